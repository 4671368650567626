// Whether a job that ended without an answer is tried again: one rule for batches and for the service.
#pragma once

#include <optional>

#include "jobs/child_process.hpp"

namespace stanchion {

struct Attempts {
  int made = 1;  ///< with the one that has ended
  int lost = 0;  ///< those before it that ended with a kill from outside, and so say little about the job
};

/// How much memory the next attempt may use, or nothing when this was the last: one that met its memory limit
/// of `memory_bytes` gets twice as much, up to `most_bytes`; one that was killed is tried once more.
std::optional<Offset> memory_of_next_attempt(const ChildEnd& end, Attempts attempts, Offset memory_bytes,
                                             Offset most_bytes);

}  // namespace stanchion
