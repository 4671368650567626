// The question of `check` on a model that is read.
#pragma once

#include "engine/prepared_pencil.hpp"

namespace stanchion {

/// Judges `model`; `outcome` has its inputs. `shared`: analysis of the matrix before, taken where the pattern
/// is the same and left for the next. The outcome's `check` is set.
Result<Outcome> check_model(ModelInput model, const Request& request, const RunContext& context,
                            ThreadPool& pool, Outcome outcome, SharedAnalysis* shared = nullptr);

}  // namespace stanchion
