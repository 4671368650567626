// Request in, outcome out: the three questions of the main job.
#pragma once

#include "base/cancellation.hpp"
#include "stanchion/outcome.hpp"
#include "stanchion/request.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// What a run may use of its surroundings. All members are optional; the pointees outlive the call.
struct RunContext {
  ProgressCallback progress;
  const CancellationToken* cancel = nullptr;
  std::function<void(const std::string& line)> log;  ///< one line a stage, for --log
};

/// Reads, analyses and judges the stiffness matrix of `request` (with every --add): is it positive definite, and
/// if not, its inertia at the resolution, with the certificate of two offset factorizations.
Result<Outcome> run_check(const Request& request, const RunContext& context);

/// The same, and where and why: the outcome's `located` is set beside `check`, unless the inertia is unresolved. Unusable
/// dof maps, node tables and axes are left out with a warning. Resource limit when the factor cannot be kept.
Result<Outcome> run_locate(const Request& request, const RunContext& context);

/// Counts at every shift of `request`, in the order asked.
Result<Outcome> run_count(const Request& request, const RunContext& context);

/// Reads and analyses only: factor size, flops, peak memory and likely time before anything is factored.
Result<Outcome> run_forecast(const Request& request, const RunContext& context);

}  // namespace stanchion
