#include <algorithm>

#include "base/clock.hpp"
#include "engine/prepared_pencil.hpp"

namespace stanchion {
namespace {

/// Gould, Math. Program. 32 (1985): In(A) = In(Z^T K Z) + (p, p, q - p), p the rank of the constraints. A without
/// zero directions has constraints of full rank, p = q; otherwise only a range follows here.
ConstrainedOutcome on_constraints(const Inertia& inertia, Level level, Index multipliers) {
  ConstrainedOutcome constrained;
  constrained.multipliers = multipliers;
  if (level == Level::kNone) return constrained;
  if (inertia.zero == 0 && inertia.negative >= multipliers) {
    constrained.rank = multipliers;
    constrained.redundant = 0;
    constrained.inertia = Inertia{inertia.negative - multipliers, 0, inertia.positive - multipliers, 0};
    return constrained;
  }
  const Index least = std::max<Index>(0, inertia.negative - multipliers);
  const Index most = std::max<Index>(0, inertia.negative + inertia.zero - multipliers) + inertia.zero;
  constrained.negative_range = {least, most};
  return constrained;
}

void explain_unresolved(const CertifiedInertia& certified, Outcome& outcome) {
  if (certified.unresolved_because.empty()) return;
  outcome.warnings.push_back({"unresolved", certified.unresolved_because, outcome.inputs.front().path});
}

Result<Outcome> check_model(ModelInput model, const Request& request, const RunContext& context, ThreadPool& pool,
                            Outcome outcome) {
  const std::vector<Index> multipliers = model.multipliers;
  auto pencil = PreparedPencil::make(model, false, request, context, pool, outcome);
  if (!pencil.ok()) return pencil.status();
  const bool definite_first = multipliers.empty();
  auto certified = pencil->certify(0, definite_first, 0, pool, outcome);
  if (!certified.ok()) return certified.status();
  CheckOutcome check;
  check.inertia = certified->inertia;
  check.certificate = certified->certificate;
  check.certificate.assumptions.emplace_back(
      "arithmetic rounds to nearest as IEEE 754 binary64 prescribes, and the dense products sum in some order");
  check.verdict = verdict_of(check.inertia, check.certificate.level);
  explain_unresolved(*certified, outcome);
  if (!multipliers.empty()) {
    check.constrained =
        on_constraints(check.inertia, check.certificate.level, static_cast<Index>(multipliers.size()));
  }
  if (request.digits) {
    auto rounded = pencil->certify(0, definite_first, pencil->digits_error(0, *request.digits), pool, outcome);
    if (!rounded.ok()) return rounded.status();
    check.verdict_as_written = verdict_of(rounded->inertia, rounded->certificate.level);
  }
  outcome.check = std::move(check);
  return outcome;
}

}  // namespace

Result<Outcome> run_check(const Request& request, const RunContext& context) {
  const Stopwatch watch;
  ThreadPool pool(threads_of(request));
  Outcome outcome = begin_outcome("check", request, Question::kCheck);
  auto model = read_model(request, context, pool, outcome);
  if (!model.ok()) return model.status();
  auto result = check_model(std::move(*model), request, context, pool, std::move(outcome));
  if (result.ok()) finish_outcome(*result, watch.seconds());
  return result;
}

}  // namespace stanchion
