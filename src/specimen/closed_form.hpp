// Turning a known spectrum into expected counts and values.
#pragma once

#include <string>
#include <vector>

#include "specimen/expected.hpp"

namespace stanchion::specimen {

/// One value of a known spectrum.
struct SpectrumValue {
  double value = 0;
  double tolerance = 0;  ///< relative distance at which the mesh may put it; 0 when exact
};

/// Counts at up to `most` shifts, each in the middle of a gap between neighbouring values of `spectrum` that
/// is at least `gap` wide (relative) and clear of both tolerances. The spectrum must be complete from its
/// lowest value up to its highest. Sorts `spectrum`.
std::vector<ExpectedCount> counts_in_gaps(Pencil pencil, std::vector<SpectrumValue>& spectrum, double gap,
                                          std::size_t most, const std::string& why);

/// The lowest `most` values, those within 1e-9 of each other as one with its multiplicity. `spectrum`
/// ascending.
std::vector<ExpectedValue> lowest_values(Pencil pencil, const std::vector<SpectrumValue>& spectrum,
                                         std::size_t most, const std::string& why);

}  // namespace stanchion::specimen
