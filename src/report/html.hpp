// An outcome as one self-contained HTML page: no network, no script, for the screen and for paper.
#pragma once

#include <string>

#include "stanchion/outcome.hpp"

namespace stanchion {

/// The page says what to_text says, in the same words, with drawings of the causes where coordinates are
/// known. `good` and `unresolved`: how the answer was judged (the exit code), for the mark beside the
/// verdict.
std::string to_html(const Outcome& outcome, bool good, bool unresolved);

}  // namespace stanchion
