// Intervals around a shift that are said to hold no eigenvalue, or those that the count leaves open: how a
// second path that counts can look into them.
#pragma once

#include <optional>
#include <utility>

#include "model/claims.hpp"

namespace stanchion {

/// The interval of `claimed` that `found` does not vouch for, so that counts at its ends are needed: the
/// distance without an eigenvalue (a little inside) unless `found` gives one as large; else the band that
/// must hold the eigenvalues between the least and the most, unless the band of `found` is about as wide for
/// its resolution. Nothing otherwise.
std::optional<std::pair<double, double>> open_interval(const ShiftCount& claimed, const ShiftCount& found);

/// What counts at both ends of open_interval() say of it, `low` and `high`; null when there are none. Agreed
/// when nothing is open.
ClaimComparison compare_intervals(const ShiftCount& claimed, const ShiftCount& found, const ShiftCount* low,
                                  const ShiftCount* high);

}  // namespace stanchion
