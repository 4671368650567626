#include "cli/log_file.hpp"

#include <fmt/format.h>
#include <spdlog/logger.h>
#include <spdlog/sinks/basic_file_sink.h>
#include <spdlog/sinks/rotating_file_sink.h>
#include <spdlog/sinks/stdout_sinks.h>

#include <chrono>
#include <ctime>
#include <filesystem>
#include <nlohmann/json.hpp>
#include <system_error>

namespace stanchion::cli {

struct LogFile::Sink {
  spdlog::logger logger;
  bool standard_error, json;
};

namespace {

/// Checked beforehand, for the sink would make the folder.
bool in_existing_folder(const std::string& path) {
  const auto folder = std::filesystem::path(path).parent_path();
  std::error_code failure;
  return folder.empty() || std::filesystem::is_directory(folder, failure);
}

Status cannot_write(const std::string& message) {
  return Status::bad_usage(
      "cannot-write", message, "--log",
      "name a file in an existing folder that you may write to, or - for standard error");
}

std::shared_ptr<spdlog::sinks::sink> make_sink(const LogOptions& options) {
  if (*options.path == "-") return std::make_shared<spdlog::sinks::stderr_sink_mt>();
  if (options.rotate_bytes == 0)
    return std::make_shared<spdlog::sinks::basic_file_sink_mt>(*options.path, !options.append);
  return std::make_shared<spdlog::sinks::rotating_file_sink_mt>(
      *options.path, static_cast<std::size_t>(options.rotate_bytes),
      static_cast<std::size_t>(options.kept_files));
}

const char* name_of(LogLevel level) {
  return level == LogLevel::kInfo ? "info" : level == LogLevel::kWarning ? "warning" : "error";
}

/// The time in UTC, to the millisecond, as RFC 3339 writes it.
std::string time_now() {
  const auto now = std::chrono::system_clock::now();
  const std::time_t seconds = std::chrono::system_clock::to_time_t(now);
  const auto since = std::chrono::duration_cast<std::chrono::milliseconds>(now.time_since_epoch()).count();
  std::tm parts{};
  ::gmtime_r(&seconds, &parts);
  char text[32];
  std::strftime(text, sizeof text, "%Y-%m-%dT%H:%M:%S", &parts);
  return fmt::format("{}.{:03}Z", text, since % 1000);
}

std::string json_line(const LogRecord& record) {
  nlohmann::ordered_json json = {
      {"time", time_now()}, {"level", name_of(record.level)}, {"event", record.event}};
  if (!record.job.empty()) json["job"] = record.job;
  json["message"] = record.text;
  return json.dump(-1, ' ', false, nlohmann::ordered_json::error_handler_t::replace);
}

/// One line, whatever names of files and messages of others hold.
std::string text_line(const LogRecord& record) {
  std::string line = record.job.empty() ? record.text : fmt::format("{}: {}", record.job, record.text);
  if (record.level != LogLevel::kInfo) line = fmt::format("{}: {}", name_of(record.level), line);
  for (char& c : line) {
    if (static_cast<unsigned char>(c) < ' ' || c == 127) c = ' ';
  }
  return line;
}

}  // namespace

Result<bool> wants_json_log(const std::optional<std::string>& format) {
  if (!format || *format == "text") return false;
  if (*format == "json") return true;
  return Status::bad_usage("bad-word", fmt::format("'{}' is no format of a log", *format), "--log-format",
                           "write text or json");
}

Result<LogFile> LogFile::open(const LogOptions& options) {
  LogFile log;
  if (!options.path) return log;
  const bool standard_error = *options.path == "-";
  if (!standard_error && !in_existing_folder(*options.path))
    return cannot_write(*options.path + ": no such folder");
  try {
    log.sink_ = std::make_shared<Sink>(
        Sink{spdlog::logger("stanchion", make_sink(options)), standard_error, options.json});
    log.sink_->logger.set_pattern(options.json ? "%v" : "%Y-%m-%dT%H:%M:%S.%e %v");
    log.sink_->logger.flush_on(spdlog::level::info);  // a log that is read while the run goes on
  } catch (const spdlog::spdlog_ex& error) {
    return cannot_write(error.what());
  }
  return log;
}

Result<LogFile> LogFile::open(const std::optional<std::string>& path) {
  LogOptions options;
  options.path = path;
  return open(options);
}

void LogFile::line(const std::string& text) const {
  record({"stage", text, "", LogLevel::kInfo});
}

void LogFile::record(const LogRecord& record) const {
  // The text is no pattern: what stands in it is not looked at.
  if (sink_)
    sink_->logger.log(spdlog::level::info,
                      spdlog::string_view_t(sink_->json ? json_line(record) : text_line(record)));
}

bool LogFile::to_standard_error() const {
  return sink_ && sink_->standard_error;
}

}  // namespace stanchion::cli
