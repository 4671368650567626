// JSON from strangers: one document, shallow, no key twice.
#pragma once

#include <nlohmann/json.hpp>
#include <string_view>

#include "stanchion/status.hpp"

namespace stanchion {

/// Bad input "bad-json" with the place in the text: malformed, not UTF-8, deeper than `most_depth`, a number
/// out of range, a key that an object has twice.
Result<nlohmann::json> strict_json(std::string_view text, int most_depth = 16);

}  // namespace stanchion
