// Where a range of values can end: at exact counts, and in gaps between estimates.
#pragma once

#include <optional>

#include "engine/mode_search.hpp"
#include "engine/residual_proof.hpp"

namespace stanchion {

/// How far behind an end that lies on a value the range goes on, relative to it: farther than intervals are
/// wide.
constexpr double kNearestEnd = 1e-6, kFarthestEnd = 0.05;

/// Exact counts for the ends of ranges. Every count costs a factorization, unless it is known.
class RangeEnds {
 public:
  RangeEnds(const PencilCounter& counter, ResidualProof& proof) : counter_(counter), proof_(proof) {}

  /// The count at an end of the range; where that lies on a value, and `may_move`, at a place behind the
  /// value: `outwards` is 1 for an upper end, -1 for a lower one.
  Result<std::optional<CountFact>> at(double end, int outwards, bool may_move);

  /// An exact count outwards of `start`, by a part of `size`; nothing where none is near.
  Result<std::optional<CountFact>> behind(double start, double size, int outwards);

  /// Moves `end` outwards in a few long strides, as long as the counts there, and at its negative where
  /// `side` says so, find no more than `many`; false when they do.
  Result<bool> look_further(double& end, Side side, Offset many);

 private:
  const PencilCounter& counter_;
  ResidualProof& proof_;
};

/// How many of `found` to take: `wanted`, and what is not told apart from the last of them; 0 as long as the
/// next one is not known well enough.
std::size_t end_of_cluster(const Candidates& found, std::size_t wanted);

/// Half the free space around `theta`, behind the first `many` of `found`, relative to it.
double gap_of(const Candidates& found, std::size_t many, double theta);

}  // namespace stanchion
