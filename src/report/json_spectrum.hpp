// How the answers of sweep, bracket, audit and load paths are written.
#pragma once

#include "report/json_parts.hpp"

namespace stanchion::json_parts {

/// Adds the members of whichever of these answers `outcome` has.
void add_spectrum(Json& document, const Outcome& outcome);

}  // namespace stanchion::json_parts
