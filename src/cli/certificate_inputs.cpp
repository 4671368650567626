#include "cli/certificate_inputs.hpp"

#include <filesystem>
#include <system_error>
#include <vector>

#include "cli/certificate_file.hpp"
#include "cli/output_targets.hpp"
#include "model/input_files.hpp"

namespace stanchion::cli {
namespace {

namespace fs = std::filesystem;

std::vector<std::string> places_of(const CertifiedFile& file, const std::optional<std::string>& root) {
  if (!root) return {file.absolute_path, file.path};
  const fs::path given = file.path;
  std::vector<std::string> places;
  if (given.is_relative()) places.push_back((fs::path(*root) / given).string());
  places.push_back((fs::path(*root) / given.filename()).string());
  return places;
}

/// The place that holds the bytes the certificate speaks of.
Result<std::string> find_input(const CertifiedFile& file, const std::optional<std::string>& root) {
  std::string changed;
  for (const std::string& place : places_of(file, root)) {
    const auto digest = digest_of_file(place);
    if (!digest.ok()) continue;
    if (*digest == file.sha256) return place;
    if (changed.empty()) changed = place;
  }
  if (!changed.empty()) return input_changed(changed);
  return Status::bad_input("input-not-found", "a file that the certificate names is not there",
                           root ? places_of(file, root).front() : file.absolute_path,
                           "put it back, or name its folder with --root");
}

}  // namespace

Status input_changed(const std::string& path) {
  return Status::bad_input("input-changed", "the file is not the one that the certificate speaks of", path,
                           "recheck with the file as it was, or ask again and make a new certificate");
}

Status find_inputs(CertificateDocument& document, const std::optional<std::string>& root) {
  InputRequest& input = document.request.input;
  std::size_t added = 0;
  for (const CertifiedFile& file : document.files) {
    auto place = find_input(file, root);
    if (!place.ok()) return place.status();
    if (file.role == "stiffness") {
      input.stiffness = std::move(*place);
    } else if (file.role == "values") {
      document.request.audit.values = std::move(*place);
    } else if (file.role == "added") {
      input.added[added++].path = std::move(*place);
    } else {
      *file_of_role(input, file.role) = std::move(*place);
    }
  }
  return {};
}

Result<std::optional<AnswerFile>> open_recheck_answer(const std::optional<std::string>& target,
                                                      const std::string& certificate,
                                                      const CertificateDocument& document) {
  std::vector<std::string> read{certificate};
  for (const CertifiedFile& file : document.files) {
    read.push_back(file.path);
    read.push_back(file.absolute_path);
  }
  return open_target("--json", target, read);
}

}  // namespace stanchion::cli
