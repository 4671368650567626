// An outcome as plain text for a person: the verdict first, then what backs it and what it does not say.
#pragma once

#include <string>

#include "stanchion/outcome.hpp"

namespace stanchion {

/// ASCII but for names the user gave, at most 100 columns (a longer path or word is left whole), ending in a
/// newline.
std::string to_text(const Outcome& outcome);

}  // namespace stanchion
