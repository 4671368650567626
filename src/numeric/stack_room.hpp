// How large the stacks of fronts are made: as forecast, and larger only where that was not enough.
#pragma once

#include <algorithm>

#include "stanchion/types.hpp"

namespace stanchion {

/// Doubles of a stack for matrices of `rows` rows, `times` the forecast: delayed pivots need no more than the
/// whole matrix.
inline Offset stack_doubles(Offset forecast, Index rows, Offset times) {
  return std::max(forecast, std::min(forecast * times, Offset{rows} * rows / 4 * 5));
}

/// The result of make(times)->run(): where most pivots of a small matrix are delayed (constraints that repeat
/// others by the hundred) stacks may fill up; then once more with larger ones, which cost address space only.
template <class Make>
auto run_with_room(const Make& make) {
  constexpr Offset kMostTimes = 4096;
  for (Offset times = 1;; times *= 16) {
    const auto factorizer = make(times);
    auto result = factorizer->run();
    if (result.ok() || !factorizer->stack_full() || times >= kMostTimes) return result;
  }
}

}  // namespace stanchion
