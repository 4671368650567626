// Tangent matrices of one pattern in order: where the inertia changes along a load path.
#pragma once

#include "engine/model_input.hpp"

namespace stanchion {

/// Judges `first`, which is read already, and every further step of `request`, with one analysis as long as
/// the pattern stays. The outcome's `path` is set, and `check` with the first step that is not definite, else
/// the last. One budget of risk for all. Crossings between two steps are not seen.
Result<Outcome> check_load_path(ModelInput first, const Request& request, const RunContext& context,
                                ThreadPool& pool, Outcome outcome);

}  // namespace stanchion
