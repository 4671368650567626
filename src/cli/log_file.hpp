// The log of a run: one line a stage, with the time.
#pragma once

#include <memory>
#include <optional>
#include <string>

#include "stanchion/status.hpp"

namespace stanchion::cli {

/// Writes to a file or to standard error. Thread safe.
class LogFile {
 public:
  /// No path: nothing is logged. "-": standard error. Bad usage ("cannot-write") when the file cannot be
  /// made.
  static Result<LogFile> open(const std::optional<std::string>& path);

  void line(const std::string& text) const;
  bool to_standard_error() const;

 private:
  struct Sink;
  std::shared_ptr<Sink> sink_;
};

}  // namespace stanchion::cli
