// Wall-clock stopwatch.
#pragma once

#include <chrono>

namespace stanchion {

/// Seconds since construction or the last restart, from a monotonic clock.
class Stopwatch {
 public:
  double seconds() const { return std::chrono::duration<double>(Clock::now() - start_).count(); }
  void restart() { start_ = Clock::now(); }

 private:
  using Clock = std::chrono::steady_clock;
  Clock::time_point start_ = Clock::now();
};

}  // namespace stanchion
