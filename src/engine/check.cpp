#include <algorithm>
#include <cstdio>

#include "base/clock.hpp"
#include "engine/check_model.hpp"
#include "engine/constraints.hpp"
#include "engine/load_path.hpp"
#include "engine/location.hpp"
#include "engine/prepared_pencil.hpp"
#include "extended/factorize.hpp"
#include "model/names.hpp"

namespace stanchion {
namespace {

void explain_unresolved(const CertifiedInertia& certified, Outcome& outcome) {
  if (certified.unresolved_because.empty()) return;
  outcome.warnings.push_back({"unresolved", certified.unresolved_because, outcome.inputs.front().path});
}

/// What double precision leaves open the same structure in double-double may tell.
void offer_last_resort(const PreparedPencil& pencil, const Request& request, Outcome& outcome) {
  if (request.precision == Precision::kExtended || request.resolution) return;
  char seconds[32];
  std::snprintf(seconds, sizeof(seconds), "%.2g", extended_seconds_forecast(pencil.analysis()));
  outcome.warnings.push_back(
      {"last-resort",
       "double precision cannot tell the zero directions from small ones of either sign; "
       "--precision extended resolves some 15 digits more, in about " +
           std::string(seconds) + " s a factorization",
       outcome.inputs.front().path});
}

}  // namespace

Result<Outcome> check_model(ModelInput model, const Request& request, const RunContext& context,
                            ThreadPool& pool, Outcome outcome, SharedAnalysis* shared) {
  const bool locate = request.want_location;
  LocationFacts facts;
  if (locate) facts = collect_location_facts(model, request, outcome);
  const std::vector<Index> multipliers = model.multipliers, original = model.original;
  ConstraintRank rank;
  if (!multipliers.empty()) {
    auto certified_rank = certify_constraint_rank(model, request, context, pool, outcome);
    if (!certified_rank.ok()) return certified_rank.status();
    rank = std::move(*certified_rank);
  }
  auto pencil = PreparedPencil::make(model, false, request, context, pool, outcome, shared);
  if (!pencil.ok()) return pencil.status();
  const bool definite_first = multipliers.empty();
  auto certified = locate ? certify_and_locate(*pencil, facts, request, rank, pool, outcome)
                          : pencil->certify(0, definite_first, 0, pool, outcome);
  if (!certified.ok()) return certified.status();
  CheckOutcome check;
  check.inertia = certified->inertia;
  check.certificate = certified->certificate;
  check.certificate.assumptions.emplace_back(
      "arithmetic rounds to nearest as IEEE 754 binary64 prescribes, and the dense products sum in some "
      "order");
  check.verdict = verdict_of(check.inertia, check.certificate.level);
  explain_unresolved(*certified, outcome);
  if (check.inertia.zero > 0 || check.verdict == Verdict::kUnresolved)
    offer_last_resort(*pencil, request, outcome);
  if (!multipliers.empty()) {
    check.constrained = judge_on_constraints(check.inertia, check.certificate, rank, original);
    if (!rank.bordered) {
      outcome.warnings.push_back(
          {"multipliers-coupled",
           "multipliers act on each other (entries between their rows), so the structure on its "
           "constraints is not judged. Remedy: check the list given to --multipliers",
           outcome.inputs.front().path});
    }
  }
  if (request.want_witness && check.verdict != Verdict::kPositiveDefinite) {
    auto witness = pencil->find_witness(original, outcome.rows_analysed + outcome.rows_struck, pool, outcome);
    if (!witness.ok()) return witness.status();
    check.witness = std::move(*witness);
  }
  if (request.digits) {
    auto rounded =
        pencil->certify(0, definite_first, pencil->digits_error(0, *request.digits), pool, outcome);
    if (!rounded.ok()) return rounded.status();
    check.verdict_for_digits = verdict_of(rounded->inertia, rounded->certificate.level);
  }
  if (shared != nullptr) pencil->leave_analysis(*shared);
  outcome.check = std::move(check);
  return outcome;
}

namespace {

Result<Outcome> check_or_locate(const Request& request, Question question, const RunContext& context) {
  const Stopwatch watch;
  ThreadPool pool(threads_of(request));
  Outcome outcome = begin_outcome(name_of(question), request, question);
  auto model = request.want_location ? read_model_to_locate(request, context, pool, outcome)
                                     : read_model(request, context, pool, outcome);
  if (!model.ok()) return model.status();
  auto result = request.steps.empty()
                    ? check_model(std::move(*model), request, context, pool, std::move(outcome))
                    : check_load_path(std::move(*model), request, context, pool, std::move(outcome));
  if (result.ok()) finish_outcome(*result, watch.seconds());
  return result;
}

}  // namespace

Result<Outcome> run_check(const Request& request, const RunContext& context) {
  return check_or_locate(request, Question::kCheck, context);
}

Result<Outcome> run_locate(const Request& request, const RunContext& context) {
  Request locating = request;
  locating.want_location = true;
  return check_or_locate(locating, Question::kLocate, context);
}

}  // namespace stanchion
