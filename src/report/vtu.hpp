// The model's nodes with motions and digits as an unstructured grid of the VTK file formats (VTU, ASCII).
#pragma once

#include <string>

#include "stanchion/located.hpp"

namespace stanchion {

/// Points are the nodes with a place, cells the links between them (lines), and a vertex for every node
/// without a link. Point data: `node`, `component`, `digits_lost` where known, and for the k-th entry
/// `motion_k` (three components, the largest 1). Format: The VTK User's Guide, "VTK File Formats", XML
/// unstructured grid, version 0.1.
std::string to_vtu(const LocateOutcome& located);

}  // namespace stanchion
