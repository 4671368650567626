#include "cli/output_targets.hpp"

#include <filesystem>
#include <system_error>

#include "model/input_files.hpp"

namespace stanchion::cli {

Status check_not_read(const std::string& option, const std::optional<std::string>& target,
                      const std::vector<std::string>& read) {
  if (!target) return {};
  for (const std::string& path : read) {
    std::error_code absent;
    if (!std::filesystem::equivalent(path, *target, absent)) continue;
    return Status::bad_usage("contradiction", path + " is read and would be overwritten", option,
                             "name another file for the answer");
  }
  return {};
}

Result<std::optional<AnswerFile>> open_target(const std::string& option,
                                              const std::optional<std::string>& target,
                                              const std::vector<std::string>& read) {
  std::optional<AnswerFile> file;
  if (!target || *target == "-") return file;
  if (Status status = check_not_read(option, target, read); !status.ok()) return status;
  auto opened = AnswerFile::open(*target);
  if (!opened.ok()) return opened.status();
  file = std::move(*opened);
  return file;
}

std::vector<std::string> files_read(const InputRequest& input) {
  std::vector<std::string> read;
  for (const InputFile& file : input_files(input)) read.push_back(file.path);
  return read;
}

namespace {

/// One spelling for each place, also of files that are not there yet.
std::filesystem::path place_of(const std::string& path) {
  std::error_code failure;
  const auto absolute = std::filesystem::absolute(path, failure);
  const auto place =
      std::filesystem::weakly_canonical(failure ? std::filesystem::path(path) : absolute, failure);
  return failure ? std::filesystem::path(path) : place;
}

}  // namespace

Status check_targets_differ(const std::vector<NamedTarget>& targets) {
  for (std::size_t i = 0; i < targets.size(); ++i) {
    for (std::size_t j = 0; j < i; ++j) {
      const auto& [option, path] = targets[i];
      const auto& [other_option, other] = targets[j];
      if (!path || !other || *path == "-" || *other == "-") continue;
      if (place_of(*path) != place_of(*other)) continue;
      return Status::bad_usage("contradiction", *path + " would be written twice",
                               other_option + ", " + option, "name a file of its own for each");
    }
  }
  return {};
}

}  // namespace stanchion::cli
