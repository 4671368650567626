#include "jobs/next_attempt.hpp"

#include <signal.h>

#include <algorithm>

namespace stanchion {
namespace {

constexpr int kMostAttempts = 6;
constexpr int kMostLost = 1;

}  // namespace

std::optional<Offset> memory_of_next_attempt(const ChildEnd& end, Attempts attempts, Offset memory_bytes,
                                             Offset most_bytes) {
  // A library that is refused memory may abort; a defect does so, too, and then again with all the memory.
  const bool aborted = end.kind == ChildEndKind::kCrashed && end.signal == SIGABRT;
  const bool met_limit = end.kind == ChildEndKind::kMemory || (aborted && attempts.made < 2);
  if (met_limit && memory_bytes < most_bytes && attempts.made < kMostAttempts) {
    return aborted ? most_bytes : std::min(2 * memory_bytes, most_bytes);
  }
  // Somebody took the child away, perhaps the kernel for want of memory.
  if (end.kind == ChildEndKind::kKilled && attempts.lost < kMostLost) {
    return std::min(2 * memory_bytes, most_bytes);
  }
  return std::nullopt;
}

}  // namespace stanchion
