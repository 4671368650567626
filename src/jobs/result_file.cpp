#include "jobs/result_file.hpp"

#include <fcntl.h>
#include <fmt/format.h>
#include <sys/file.h>
#include <sys/stat.h>
#include <unistd.h>

#include <cerrno>
#include <cstring>
#include <ctime>
#include <nlohmann/json.hpp>
#include <set>
#include <utility>

#include "jobs/durable_file.hpp"
#include "model/version.hpp"

namespace stanchion {
namespace {

using Json = nlohmann::ordered_json;

Json json_of(const ChildFailure& failure) {
  return Json{{"kind", failure.kind},
              {"code", failure.code},
              {"message", failure.message},
              {"place", failure.place},
              {"remedy", failure.remedy}};
}

/// The document on one line: strings hold no bare line ends, so the layout can go.
std::string on_one_line(std::string_view document) {
  std::string line;
  line.reserve(document.size());
  bool layout = false;
  for (const char c : document) {
    if (c == '\n' || c == '\r') {
      layout = true;
    } else if (!layout || (c != ' ' && c != '\t')) {
      layout = false;
      line += c;
    }
  }
  return line;
}

std::string dumped(const Json& json) {
  return json.dump(-1, ' ', false, Json::error_handler_t::replace);
}

Status write_failed(const std::string& path, int error) {
  return Status::resource_limit("write-failed",
                                fmt::format("the results could not be written: {}", std::strerror(error)),
                                path, "free some disk space and go on with --resume");
}

/// The file that `path` names, for this process alone: also not one that was replaced since it was opened.
Status take_lock(int file, const std::string& path) {
  struct stat opened {
  }, named{};
  if (::flock(file, LOCK_EX | LOCK_NB) == 0 && ::fstat(file, &opened) == 0 &&
      ::stat(path.c_str(), &named) == 0 && opened.st_ino == named.st_ino && opened.st_dev == named.st_dev) {
    return {};
  }
  return Status::resource_limit("in-use", "another run writes to these results", path,
                                "wait for it, or name another file with --results");
}

/// Calls `take` with every line.
void each_line(std::string_view text, const std::function<void(std::string_view line, bool complete)>& take) {
  while (!text.empty()) {
    const auto end = text.find('\n');
    take(text.substr(0, end), end != std::string_view::npos);
    if (end == std::string_view::npos) return;
    text.remove_prefix(end + 1);
  }
}

}  // namespace

std::string utc_now() {
  const std::time_t now = std::time(nullptr);
  std::tm parts{};
  ::gmtime_r(&now, &parts);
  char text[32];
  std::strftime(text, sizeof text, "%Y-%m-%dT%H:%M:%SZ", &parts);
  return text;
}

std::string result_line(const JobResult& result, std::string_view outcome) {
  Json json;
  json["schema_version"] = 1;
  json["program"] = {{"name", program_name()}, {"version", program_version()}};
  json["id"] = result.id;
  json["command"] = result.command;
  json["digest"] = result.digest ? Json(*result.digest) : Json(nullptr);
  json["exit_code"] = result.exit_code;
  json["reason"] = result.reason.empty() ? Json(nullptr) : Json(result.reason);
  json["failure"] = result.failure ? json_of(*result.failure) : Json(nullptr);
  json["seconds"] = result.seconds;
  json["cpu_seconds"] = result.cpu_seconds;
  json["peak_bytes"] = result.peak_bytes;
  json["attempts"] = result.attempts;
  json["finished"] = result.finished;
  std::string line = dumped(json);
  line.pop_back();
  return line + ",\"outcome\":" + (outcome.empty() ? std::string("null") : on_one_line(outcome)) + "}";
}

std::optional<JobResult> read_result_line(std::string_view line) {
  const Json json = Json::parse(line.begin(), line.end(), nullptr, false);
  if (!json.is_object()) return std::nullopt;
  try {
    JobResult result;
    result.id = json.at("id").get<std::string>();
    result.command = json.at("command").get<std::string>();
    if (!json.at("digest").is_null()) result.digest = json["digest"].get<std::string>();
    result.exit_code = json.at("exit_code").get<int>();
    if (!json.at("reason").is_null()) result.reason = json["reason"].get<std::string>();
    result.seconds = json.at("seconds").get<double>();
    result.cpu_seconds = json.at("cpu_seconds").get<double>();
    result.peak_bytes = json.at("peak_bytes").get<Offset>();
    result.attempts = json.at("attempts").get<int>();
    result.finished = json.at("finished").get<std::string>();
    if (!json.contains("outcome")) return std::nullopt;
    return result;
  } catch (const Json::exception&) {
    return std::nullopt;
  }
}

ResultFile::ResultFile(ResultFile&& other) noexcept {
  *this = std::move(other);
}

ResultFile& ResultFile::operator=(ResultFile&& other) noexcept {
  std::swap(path_, other.path_);
  std::swap(file_, other.file_);
  return *this;
}

ResultFile::~ResultFile() {
  if (file_ >= 0) ::close(file_);
}

Result<ResultFile> ResultFile::open(const std::string& path) {
  ResultFile results;
  results.path_ = path;
  const auto cannot_write = [&path] {
    return Status::bad_usage("cannot-write",
                             fmt::format("the file cannot be written: {}", std::strerror(errno)), path,
                             "name a file in an existing folder that you may write to");
  };
  results.file_ = ::open(path.c_str(), O_RDWR | O_CREAT | O_APPEND | O_CLOEXEC | O_NONBLOCK, 0666);
  if (results.file_ < 0) return cannot_write();
  struct stat about {};
  if (::fstat(results.file_, &about) != 0 || !S_ISREG(about.st_mode)) {
    errno = EINVAL;
    return cannot_write();
  }
  if (Status alone = take_lock(results.file_, path); !alone.ok()) return alone;
  return results;
}

bool ResultFile::empty() const {
  struct stat about {};
  return ::fstat(file_, &about) == 0 && about.st_size == 0;
}

Result<ResultFile::Found> ResultFile::recover(const std::function<bool(const JobResult&)>& keep) {
  const auto bytes = read_whole(path_);
  if (!bytes) return write_failed(path_, errno);
  Found found;
  std::set<std::string> seen;
  std::string kept;
  each_line(*bytes, [&](std::string_view line, bool complete) {
    auto result = complete ? read_result_line(line) : std::nullopt;
    if (!result) {
      ++found.damaged;
    } else if (!seen.insert(result->id).second) {
      ++found.doubled;
    } else if (keep(*result)) {
      kept.append(line).push_back('\n');
      found.results.push_back(std::move(*result));
    }
  });
  if (kept == *bytes) return found;
  if (Status written = write_durably(path_, kept); !written.ok()) return written;
  const int file = ::open(path_.c_str(), O_RDWR | O_APPEND | O_CLOEXEC);
  if (file < 0) return write_failed(path_, errno);
  ::close(std::exchange(file_, file));
  if (Status alone = take_lock(file_, path_); !alone.ok()) return alone;
  return found;
}

Status ResultFile::append(const std::string& line) {
  struct stat before {};
  if (::fstat(file_, &before) != 0) return write_failed(path_, errno);
  const std::string bytes = line + "\n";
  std::size_t have = 0;
  while (have < bytes.size()) {
    const ssize_t written = ::write(file_, bytes.data() + have, bytes.size() - have);
    if (written < 0 && errno == EINTR) continue;
    if (written < 0) {
      const int error = errno;
      const int cut = ::ftruncate(file_, before.st_size);
      (void)cut;  // else --resume removes the half line
      return write_failed(path_, error);
    }
    have += static_cast<std::size_t>(written);
  }
  return ::fdatasync(file_) == 0 ? Status{} : write_failed(path_, errno);
}

Status read_results(const std::string& path,
                    const std::function<Status(const JobResult&, std::string_view line)>& take) {
  const auto bytes = read_whole(path);
  if (!bytes) {
    return Status::bad_input("file-not-found", "the results cannot be read", path, "check the name");
  }
  Status first;
  std::size_t number = 0;
  each_line(*bytes, [&](std::string_view line, bool complete) {
    ++number;
    if (!first.ok()) return;
    const auto result = complete ? read_result_line(line) : std::nullopt;
    if (result) {
      first = take(*result, line);
    } else {
      first = Status::bad_input("bad-results", "this line is no complete result",
                                fmt::format("{}:{}", path, number),
                                "run this part again with --resume, which mends the file");
    }
  });
  return first;
}

}  // namespace stanchion
