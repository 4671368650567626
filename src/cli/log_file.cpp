#include "cli/log_file.hpp"

#include <fmt/format.h>
#include <spdlog/logger.h>
#include <spdlog/sinks/basic_file_sink.h>
#include <spdlog/sinks/stdout_sinks.h>

namespace stanchion::cli {

struct LogFile::Sink {
  spdlog::logger logger;
  bool standard_error;
};

Result<LogFile> LogFile::open(const std::optional<std::string>& path) {
  LogFile log;
  if (!path) return log;
  try {
    const bool standard_error = *path == "-";
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
    return Status::bad_usage(
        "cannot-write", error.what(), "--log",
        "name a file in an existing folder that you may write to, or - for standard error");
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
