// The gate between what a user typed and the engine: ranges and contradictions.
#pragma once

#include "model/question.hpp"
#include "stanchion/request.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// Ok, or bad usage naming the option (as the command line spells it), what is wrong with it and the remedy.
/// After it the engine may rely on: a stiffness path; at most one of geometric and mass, and `pencil`
/// agreeing with it; finite shifts (at least one for a count); for a
/// sweep finite ends in order, at least two points, one sign where spacing is geometric; for a bracket
/// exactly one of `first` and a range, and a unit that fits the pencil; for an audit a list and a second
/// matrix; 0 < risk < 1; 0 < resolution < 1; digits 1..17; threads >= 0; a positive memory cap; finite
/// factors of added matrices; base 0 or 1; positive rows.
Status validate(const Request& request, Question question);

}  // namespace stanchion
