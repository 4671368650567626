// The answers of an audit and of a load path as charts of the page.
#pragma once

#include <string>

#include "report/chart.hpp"
#include "stanchion/outcome.hpp"

namespace stanchion {

/// The values listed over their range, and below them where as many are counted, where some are missing and
/// where some are surplus: told apart by shape and words. Empty without an audit.
std::string audit_svg(const Outcome& outcome, ChartWidth width = ChartWidth::kWide);

/// Negative and zero directions by step, and the steps at which the structure gives way. Empty without a
/// path.
std::string path_svg(const Outcome& outcome, ChartWidth width = ChartWidth::kWide);

}  // namespace stanchion
