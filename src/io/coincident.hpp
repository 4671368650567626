// Places that fall on one another.
#pragma once

#include <array>
#include <cstddef>
#include <utility>
#include <vector>

namespace stanchion {

/// Pairs (smaller index first, ascending) of places no further apart than `near` in each coordinate. Of a
/// crowd at one place each is paired with the next few. Cost: sorting.
std::vector<std::pair<std::size_t, std::size_t>> coincident_places(
    const std::vector<std::array<double, 3>>& places, double near);

/// Largest extent of the box around all places; 0 for none.
double extent_of(const std::vector<std::array<double, 3>>& places);

}  // namespace stanchion
