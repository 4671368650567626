// An outcome as JUnit XML, for build servers that collect test results.
#pragma once

#include <string>
#include <vector>

#include "stanchion/outcome.hpp"

namespace stanchion {

enum class JunitState { kPassed, kFailed, kError };

struct JunitCase {
  std::string name, message;
  JunitState state = JunitState::kPassed;
  std::string type = {}, text = {};  ///< of a failure or error; empty: that of the state, and the message
};

/// A document of one suite, "stanchion.<command>", shown as `title` where that is not empty; the first case
/// takes all `seconds`.
std::string junit_document(const std::string& command, const std::string& title,
                           const std::vector<JunitCase>& cases, double seconds);

/// One test case for the answer itself (failed when not good, in error when unresolved), one for each shift
/// counted, one failed case for each cause.
std::string to_junit(const Outcome& outcome, bool good, bool unresolved);

}  // namespace stanchion
