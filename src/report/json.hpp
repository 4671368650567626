// An outcome as a JSON document, schema_version 1 (data/schemas/outcome-1.json describes it key for key).
#pragma once

#include <string>

#include "stanchion/outcome.hpp"

namespace stanchion {

/// The document, indented by two spaces, ending in a newline. Keys come in a fixed order; numbers read back
/// to the same bits; a number that is not finite becomes null; bytes that are no UTF-8 are replaced.
std::string to_json(const Outcome& outcome);

}  // namespace stanchion
