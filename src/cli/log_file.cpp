#include "cli/log_file.hpp"

#include <fmt/format.h>
#include <spdlog/logger.h>
#include <spdlog/sinks/basic_file_sink.h>
#include <spdlog/sinks/stdout_sinks.h>

#include <filesystem>
#include <system_error>

namespace stanchion::cli {

struct LogFile::Sink {
  spdlog::logger logger;
  bool standard_error;
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

}  // namespace

Result<LogFile> LogFile::open(const std::optional<std::string>& path) {
  LogFile log;
  if (!path) return log;
  const bool standard_error = *path == "-";
  if (!standard_error && !in_existing_folder(*path)) return cannot_write(*path + ": no such folder");
  try {
    std::shared_ptr<spdlog::sinks::sink> sink;
    if (standard_error) {
      sink = std::make_shared<spdlog::sinks::stderr_sink_mt>();
    } else {
      sink = std::make_shared<spdlog::sinks::basic_file_sink_mt>(*path, true);
    }
    log.sink_ = std::make_shared<Sink>(Sink{spdlog::logger("stanchion", std::move(sink)), standard_error});
    log.sink_->logger.set_pattern("%Y-%m-%dT%H:%M:%S.%e %v");
    log.sink_->logger.flush_on(spdlog::level::info);  // a log that is read while the run goes on
  } catch (const spdlog::spdlog_ex& error) {
    return cannot_write(error.what());
  }
  return log;
}

void LogFile::line(const std::string& text) const {
  if (sink_) sink_->logger.info(text);
}

bool LogFile::to_standard_error() const {
  return sink_ && sink_->standard_error;
}

}  // namespace stanchion::cli
