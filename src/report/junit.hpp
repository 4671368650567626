// An outcome as JUnit XML, for build servers that collect test results.
#pragma once

#include <string>

#include "stanchion/outcome.hpp"

namespace stanchion {

/// One test case for the answer itself (failed when not good, in error when unresolved), one for each shift
/// counted, one failed case for each cause.
std::string to_junit(const Outcome& outcome, bool good, bool unresolved);

}  // namespace stanchion
