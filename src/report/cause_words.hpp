// Words about causes that every kind of report uses.
#pragma once

#include <string>

#include "stanchion/located.hpp"

namespace stanchion {

/// "Loose part", "Negative spring", ...
const char* title_of(Cause cause);

/// "6 zero directions", "1 negative direction", "2 weak directions", "3 couplings".
std::string how_many(const Direction& direction);

/// "node 12 ux", or "equation 17".
std::string dof_in_words(const DofShare& share);

/// 0.123 -> "12 %"; below one per mille "<0.1 %".
std::string percent(double share);

/// "3 causes for 8 of 20 directions; ...", or that nothing was found.
std::string location_headline(const LocateOutcome& located);

/// What the levels say of the worst equation.
std::string accuracy_verdict(const LocalAccuracy& accuracy);

/// "node 12 ux; node 7 uz; and 3 more": where zero directions were held for the local accuracy.
std::string held_in_words(const LocalAccuracy& accuracy);

}  // namespace stanchion
