// Cooperative cancellation and progress, passed down by reference; no globals.
#pragma once

#include <atomic>
#include <functional>

namespace stanchion {

/// Set from a signal handler or another thread; polled by long loops.
class CancellationToken {
 public:
  void cancel() { cancelled_.store(true, std::memory_order_relaxed); }
  bool cancelled() const { return cancelled_.load(std::memory_order_relaxed); }

 private:
  std::atomic<bool> cancelled_{false};
};

/// Called with a stage name and the fraction of that stage done (0 to 1), possibly from any thread but never
/// from two at once.
using ProgressCallback = std::function<void(const char* stage, double fraction)>;

}  // namespace stanchion
