// Loads can reverse and signs of G can be wrong: what lies on the side of zero that nobody asked about.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "engine/pencil_counter.hpp"

namespace stanchion {

/// Counts at the mirror of the farthest of the asked shifts, when all of them lie on one side of zero;
/// nothing otherwise. Adds a sentence, and a warning when factors lie there. One factorization when there are
/// none.
Result<std::optional<ShiftCount>> look_at_the_other_side(PencilCounter& counter, double lowest,
                                                         double highest, Outcome& outcome,
                                                         std::vector<std::string>& sentences);

/// The same with a count that is there already.
void say_other_side(const ShiftCount& other, Outcome& outcome, std::vector<std::string>& sentences);

/// K and K + f G both definite: definite at every factor between (a convex combination). Nothing when no
/// certified count is 0.
std::optional<std::string> convexity_sentence(const std::vector<ShiftCount>& counts, bool constrained);

}  // namespace stanchion
