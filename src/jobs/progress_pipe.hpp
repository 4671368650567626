// The child's end of --progress-fd: one JSON object a line, {"phase", "done", "total"}, and at the end of a
// run that failed {"failure": {"kind", "code", "message", "place", "remedy"}}.
#pragma once

#include <string>

#include "base/clock.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// Never waits for a reader that is slow and does not mind one that is gone. `update` calls must not overlap
/// (the engine promises that).
class ProgressPipe {
 public:
  /// Negative: nothing is written. Turns SIGPIPE off for the process.
  explicit ProgressPipe(int handle);

  /// At most twenty lines a second, and one for each new phase.
  void update(const char* phase, double fraction);

  void fail(const Status& failure);

 private:
  void write(const std::string& line) const;

  int handle_;
  std::string phase_;
  Stopwatch since_written_;
};

}  // namespace stanchion
