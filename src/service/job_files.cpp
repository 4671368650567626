#include "service/job_files.hpp"

#include <sys/stat.h>

#include <algorithm>
#include <array>
#include <cerrno>
#include <filesystem>
#include <fstream>
#include <nlohmann/json.hpp>

namespace stanchion::service {
namespace {

bool has_input(const JobRequest& request, const std::string& key) {
  return std::any_of(request.inputs.begin(), request.inputs.end(),
                     [&key](const JobInput& input) { return input.key == key; });
}

bool has_option(const JobRequest& request, const std::string& key) {
  return std::any_of(request.options.begin(), request.options.end(),
                     [&key](const JobOption& option) { return option.key == key; });
}

bool leaves(const JobRequest& request, const std::string& name) {
  const bool steps = has_input(request, "steps");
  const bool locates =
      request.command == "locate" || (request.command == "check" && has_option(request, "locate"));
  if (name == "certificate") return (request.command == "check" && !steps) || request.command == "count";
  if (name == "svg") return request.command == "sweep";
  if (name == "view") return locates && has_input(request, "nodes");
  if (name == "vtu") {
    return has_input(request, "nodes") &&
           (locates || (request.command == "bracket" && has_input(request, "dofs")));
  }
  return true;
}

/// Formats that hold more than their size says: gzip, zip, HDF5.
bool is_plain(int file) {
  std::array<unsigned char, 4> begin{};
  if (::pread(file, begin.data(), begin.size(), 0) < 2) return true;
  if (begin[0] == 0x1f && begin[1] == 0x8b) return false;
  if (begin[0] == 'P' && begin[1] == 'K') return false;
  return !(begin[0] == 0x89 && begin[1] == 'H');
}

/// A file name without anything that could lead elsewhere.
std::string tame_name(const std::optional<std::string>& name) {
  std::string tame;
  for (const char c : name.value_or("")) {
    const bool fine = (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') ||
                      c == '.' || c == '_' || c == '-';
    tame += fine ? c : '_';
  }
  if (tame.empty() || tame[0] == '.' || tame[0] == '-') tame = "file" + tame;
  return tame.substr(0, 100);
}

}  // namespace

const std::vector<JobFile>& job_files() {
  static const std::vector<JobFile> files = {
      {"result", "result.json", "--json", "application/json"},
      {"report", "report.html", "--html", "text/html; charset=utf-8"},
      {"csv", "answer.csv", "--csv", "text/csv; charset=utf-8"},
      {"junit", "junit.xml", "--junit", "application/xml"},
      {"certificate", "certificate.json", "--certificate", "application/json"},
      {"svg", "staircase.svg", "--svg", "image/svg+xml"},
      {"vtu", "model.vtu", "--vtu", "application/xml"},
      {"view", "view.json", "--view", "application/json"},
      {"log", "log.txt", "--log", "text/plain; charset=utf-8"},
      {"text", "text.txt", nullptr, "text/plain; charset=utf-8"},
  };
  return files;
}

const JobFile* job_file(const std::string& name) {
  for (const JobFile& file : job_files()) {
    if (name == file.name) return &file;
  }
  return nullptr;
}

std::vector<std::string> output_arguments(const JobRequest& request) {
  std::vector<std::string> arguments;
  for (const JobFile& file : job_files()) {
    if (file.option == nullptr || !leaves(request, file.name)) continue;
    arguments.push_back(std::string(file.option) + "=../" + file.file);
  }
  return arguments;
}

std::optional<std::string> digest_in(const std::string& input_name) {
  constexpr std::string_view kScheme = "sha256:";
  if (input_name.rfind(kScheme, 0) != 0) return std::nullopt;
  return input_name.substr(kScheme.size());
}

Result<OpenInputs> OpenInputs::open(const JobRequest& request, const Roots& roots, const InputStore& store) {
  OpenInputs inputs;
  for (const JobInput& input : request.inputs) {
    FileHandle handle;
    if (const auto digest = digest_in(input.path)) {
      auto opened = store.open(*digest);
      if (!opened.ok()) return opened.status();
      handle = std::move(*opened);
      inputs.digests_.push_back(*digest);
    } else {
      auto opened = roots.open_file(input.path);
      if (!opened.ok()) return opened.status();
      handle = std::move(opened->handle);
    }
    struct stat facts {};
    if (::fstat(handle.get(), &facts) != 0) return Status::internal("an open file has no size", input.path);
    inputs.bytes_ += facts.st_size;
    inputs.all_plain_ = inputs.all_plain_ && is_plain(handle.get());
    inputs.handles_.push_back(std::move(handle));
  }
  return inputs;
}

Status OpenInputs::link_into(const std::string& folder, JobRequest& request,
                             const std::vector<std::optional<std::string>>& names) const {
  namespace fs = std::filesystem;
  std::error_code failure;
  for (std::size_t k = 0; k < handles_.size(); ++k) {
    std::string& path = request.inputs[k].path;
    if (const auto digest = digest_in(path))
      path = "uploads/" + digest->substr(0, 12) + "/" + tame_name(names[k]);
    const fs::path link = fs::path(folder) / path;
    fs::create_directories(link.parent_path(), failure);
    const std::string target =
        "/proc/" + std::to_string(::getpid()) + "/fd/" + std::to_string(handles_[k].get());
    if (::symlink(target.c_str(), link.c_str()) != 0 && errno != EEXIST) {
      return Status::resource_limit("store", "the folder of a job cannot be written", link.string(),
                                    "look after the disk that holds the store");
    }
  }
  return {};
}

std::optional<std::string> headline_of(const std::string& result_path) {
  std::ifstream file(result_path);
  if (!file) return std::nullopt;
  // The sentences stand on the first level; what lies deeper is passed over.
  const auto shallow = [](int depth, nlohmann::json::parse_event_t event, nlohmann::json& parsed) {
    if (depth == 1 && event == nlohmann::json::parse_event_t::key)
      return parsed == nlohmann::json("in_words");
    return true;
  };
  const auto json = nlohmann::json::parse(file, shallow, false);
  if (!json.is_object() || !json.contains("in_words")) return std::nullopt;
  const auto& words = json["in_words"];
  if (!words.is_array() || words.empty() || !words[0].is_string()) return std::nullopt;
  return words[0].get<std::string>();
}

}  // namespace stanchion::service
