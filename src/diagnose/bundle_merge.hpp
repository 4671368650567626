// Bundles of one cause, put together.
#pragma once

#include <vector>

#include "diagnose/purify.hpp"

namespace stanchion {

/// The marked bundles of every part become one: constraints that repeat others are one cause, with all their
/// multipliers. `marked` is by bundle; the others stay as they are, in their order.
void merge_marked(std::vector<Bundle>& bundles, const std::vector<char>& marked, double active);

/// Bundles of one part that share nodes and have nearly as many motions as nodes (a pinned chain moves in as
/// many overlapping ways as it has joints) become one, marked `chain`. Parts that are not held stay apart.
void merge_chains(std::vector<Bundle>& bundles, double active);

}  // namespace stanchion
