// Whether a claim can be what its own certificate gives: an altered document often cannot.
#pragma once

#include <optional>
#include <string>

#include "stanchion/outcome.hpp"

namespace stanchion {

/// "2 negative, 0 zero, 8 positive".
std::string in_words(const Inertia& inertia);

/// Why no matrix satisfies the claim, or why its factorizations do not give it; nothing when all fits.
std::optional<std::string> contradiction_within(const CheckOutcome& check, Index rows);
std::optional<std::string> contradiction_within(const ShiftCount& count, Index rows);

/// Why the failure probabilities of an outcome do not fit together: every statistical attempt is charged
/// once, the charges add up to what was spent and stay within what was allowed, and no statement is surer
/// than an attempt that passed.
std::optional<std::string> contradiction_within_risk(const Outcome& outcome);

}  // namespace stanchion
