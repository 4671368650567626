// Fingerprints of what a run made of its files: the equations struck out and the scaling.
#pragma once

#include <span>
#include <string>
#include <vector>

#include "stanchion/types.hpp"

namespace stanchion {

/// SHA-256 of the equations (given from 0), one a line, numbered from 1.
std::string equations_fingerprint(const std::vector<Index>& equations);

/// SHA-256 of the exponents of a scaling by powers of two, one a line in the order of the equations; `scale`
/// is by elimination position. Two runs with the same fingerprint speak of the same scaled matrix.
std::string scaling_fingerprint(std::span<const double> scale, std::span<const Index> position_of);

}  // namespace stanchion
