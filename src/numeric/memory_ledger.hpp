// Bytes that the workers of one factorization hold, against a cap.
#pragma once

#include <atomic>
#include <optional>
#include <string>

#include "stanchion/status.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

/// Thread safe.
class MemoryLedger {
 public:
  explicit MemoryLedger(std::optional<Offset> cap) : cap_(cap) {}

  /// Books `change` bytes; false when the cap would be passed.
  bool book(Offset change) {
    const Offset now = bytes_.fetch_add(change) + change;
    Offset seen = peak_.load();
    while (now > seen && !peak_.compare_exchange_weak(seen, now)) {
    }
    return change <= 0 || !cap_ || now <= *cap_;
  }

  Offset peak() const { return peak_; }

  /// What to report when book() said no, or a stack that was sized for the cap is full.
  Status limit_reached() const {
    return Status::resource_limit("memory-cap",
                                  "the numeric phase needs more memory than allowed; it had reached " +
                                      std::to_string(bytes_.load() / (1024 * 1024)) + " MiB",
                                  "", "raise --memory-cap, or use fewer threads");
  }

 private:
  std::optional<Offset> cap_;
  std::atomic<Offset> bytes_{0}, peak_{0};
};

}  // namespace stanchion
