// A run that gave no answer, for people and for build servers: what they asked for must be there, and say so.
#pragma once

#include <string>
#include <vector>

#include "stanchion/outcome.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// A question and why it has no answer.
struct Refusal {
  std::string command;                 ///< "check", "locate", ...
  std::vector<std::string> arguments;  ///< as typed
  std::optional<std::string> title, reference;
  std::vector<TableRecord> inputs;  ///< as named by the request, with no digest: nothing vouches for them
  Status why;                       ///< never ok
  int exit_code = 0;
  bool answered = false;  ///< the answer was there and could not be written
};

/// One page in the manner of to_html: that there is no answer, why, where, the remedy, and what was asked.
std::string refusal_to_html(const Refusal& refusal);

/// One test case, of the name that the answer has in to_junit, in error, with code, message, place, remedy.
std::string refusal_to_junit(const Refusal& refusal);

}  // namespace stanchion
