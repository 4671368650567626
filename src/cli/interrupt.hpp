// Ctrl-C and termination requests: the first asks the work to stop, the second kills.
#pragma once

#include "base/cancellation.hpp"

namespace stanchion::cli {

/// While it lives, SIGINT and SIGTERM cancel `token`. One at a time.
class InterruptGuard {
 public:
  explicit InterruptGuard(CancellationToken& token);
  InterruptGuard(const InterruptGuard&) = delete;
  InterruptGuard& operator=(const InterruptGuard&) = delete;
  ~InterruptGuard();
};

}  // namespace stanchion::cli
