// The staircase of a sweep as a picture.
#pragma once

#include <string>

#include "report/chart.hpp"
#include "stanchion/outcome.hpp"

namespace stanchion {

/// A self-contained SVG of the counts over their shifts: a tread between shifts where the count is the same,
/// a hatched block where it jumps somewhere between two shifts, one mark a count. Empty when `outcome` has no
/// counts. The shifts are drawn on a logarithmic axis when `logarithmic` (all of one sign). Reproducible; for
/// pages that embed it as it is.
std::string staircase_svg(const Outcome& outcome, bool logarithmic, ChartWidth width = ChartWidth::kWide);

}  // namespace stanchion
