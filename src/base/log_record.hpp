// One line of a log, as whoever writes it knows it; how it looks is decided where it ends up.
#pragma once

#include <functional>
#include <string>
#include <utility>

namespace stanchion {

enum class LogLevel { kInfo, kWarning, kError };

struct LogRecord {
  LogRecord(std::string what, std::string words, std::string whose = {}, LogLevel how_bad = LogLevel::kInfo)
      : event(std::move(what)), text(std::move(words)), job(std::move(whose)), level(how_bad) {}

  std::string event;  ///< what happened, in one word for programs: "job-ended"
  std::string text;   ///< the same in words
  std::string job;    ///< id; empty when it is about none
  LogLevel level;
};

/// Called from any thread.
using LogSink = std::function<void(const LogRecord&)>;

}  // namespace stanchion
