// Brackets from counts alone, by bisection: the method of last resort, and a check of the other one.
#pragma once

#include "engine/bracket_question.hpp"

namespace stanchion {

/// The values in `range`, or with `first` that many of the lowest (of K + f G: above 0, or below 0 when
/// `negative`), each interval no wider than `width` relative to its ends unless the precision of counts
/// forbids it. `known`: counts made already. Cost: some 30 to 40 factorizations a value.
Result<FoundRange> bracket_by_counts(PencilCounter& counter, const Request& request, const ValueRange& range,
                                     std::optional<Index> first, bool negative, Staircase known,
                                     Outcome& outcome);

}  // namespace stanchion
