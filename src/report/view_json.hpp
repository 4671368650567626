// The located motions on the reduced node cloud as JSON: what a browser needs to draw and turn the model.
#pragma once

#include <string>

#include "stanchion/located.hpp"

namespace stanchion {

/// Described by data/schemas/view-1.json: nodes with their places relative to `centre`, links, digits lost,
/// and for each direction that moves something the nodes that move, each with its three components. At most
/// 16,000 nodes and 40,000 links, whatever the model has.
std::string to_view_json(const LocateOutcome& located);

}  // namespace stanchion
