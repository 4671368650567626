// The log of a run: one line a stage or event, with the time.
#pragma once

#include <memory>
#include <optional>
#include <string>

#include "base/log_record.hpp"
#include "stanchion/status.hpp"
#include "stanchion/types.hpp"

namespace stanchion::cli {

struct LogOptions {
  std::optional<std::string> path;  ///< absent: nothing is logged; "-": standard error
  bool json = false;                ///< each line a JSON object
  bool append = false;              ///< go on behind what an earlier run left
  Offset rotate_bytes = 0;          ///< a file that would grow beyond this becomes NAME.1.EXT; 0: never
  int kept_files = 0;               ///< besides the one being written; the oldest is deleted
};

/// "text" or "json"; bad usage for anything else.
Result<bool> wants_json_log(const std::optional<std::string>& format);

/// Writes to a file or to standard error. Thread safe.
class LogFile {
 public:
  /// Bad usage ("cannot-write") when the file cannot be made.
  static Result<LogFile> open(const LogOptions& options);

  /// Text, written anew.
  static Result<LogFile> open(const std::optional<std::string>& path);

  void line(const std::string& text) const;
  void record(const LogRecord& record) const;
  bool to_standard_error() const;

 private:
  struct Sink;
  std::shared_ptr<Sink> sink_;
};

}  // namespace stanchion::cli
