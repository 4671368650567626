#include "model/exit_code.hpp"

#include <algorithm>

namespace stanchion {
namespace {

ExitCode from_comparison(Comparison comparison) {
  switch (comparison) {
    case Comparison::kMet:
      return kExitGood;
    case Comparison::kNotMet:
      return kExitNotGood;
    case Comparison::kOpen:
      break;
  }
  return kExitUnresolved;
}

ExitCode code_of_check(const CheckOutcome& check) {
  if (check.verdict == Verdict::kUnresolved || check.certificate.level == Level::kNone)
    return kExitUnresolved;
  if (check.verdict != Verdict::kPositiveDefinite) return kExitNotGood;
  // With --digits: definite for the numbers as written is not enough when their rounding could undo it.
  if (!check.verdict_for_digits || *check.verdict_for_digits == Verdict::kPositiveDefinite) return kExitGood;
  return *check.verdict_for_digits == Verdict::kUnresolved ? kExitUnresolved : kExitNotGood;
}

/// Good when nothing is there to be named.
ExitCode code_of_location(const Outcome& outcome) {
  if (!outcome.located || code_of_check(*outcome.check) == kExitUnresolved) return kExitUnresolved;
  const auto& directions = outcome.located->directions;
  const bool open = std::any_of(directions.begin(), directions.end(), [](const Direction& direction) {
    return direction.cause == Cause::kUnresolved;
  });
  if (open) return kExitUnresolved;
  return directions.empty() && outcome.located->not_located == 0 ? kExitGood : kExitNotGood;
}

ExitCode code_of_count(const CountOutcome& count) {
  const bool all = std::all_of(count.counts.begin(), count.counts.end(), [](const ShiftCount& shift) {
    return shift.below.has_value() && shift.level != Level::kNone;
  });
  return all ? kExitGood : kExitUnresolved;
}

/// A shift on a value is answered by its band; contradicting certificates are a defect.
ExitCode code_of_sweep(const CountOutcome& count, const SweepOutcome& sweep) {
  if (!sweep.contradictions.empty()) return kExitInternal;
  const bool all = std::all_of(count.counts.begin(), count.counts.end(), [](const ShiftCount& shift) {
    return shift.certificate.level != Level::kNone && (shift.below || shift.holds_outside);
  });
  return all ? kExitGood : kExitUnresolved;
}

ExitCode code_of_bracket(const BracketOutcome& bracket) {
  const bool all = std::all_of(bracket.critical.begin(), bracket.critical.end(),
                               [](const CriticalValue& value) { return value.level != Level::kNone; });
  return all && bracket.complete && bracket.complete->count ? kExitGood : kExitUnresolved;
}

ExitCode code_of_audit(const AuditOutcome& audit) {
  if (audit.verdict == AuditVerdict::kUnresolved) return kExitUnresolved;
  return audit.verdict == AuditVerdict::kComplete ? kExitGood : kExitNotGood;
}

ExitCode code_of_path(const PathOutcome& path) {
  ExitCode code = kExitGood;
  for (const PathStep& step : path.steps) {
    if (step.verdict == Verdict::kUnresolved) return kExitUnresolved;
    if (step.verdict != Verdict::kPositiveDefinite) code = kExitNotGood;
  }
  return code;
}

}  // namespace

ExitCode exit_code(StatusKind kind) {
  switch (kind) {
    case StatusKind::kOk:
      return kExitGood;
    case StatusKind::kBadUsage:
    case StatusKind::kBadInput:
      return kExitUsage;
    case StatusKind::kResourceLimit:
      return kExitResource;
    case StatusKind::kInterrupted:
      return kExitInterrupted;
    case StatusKind::kInternal:
      break;
  }
  return kExitInternal;
}

ExitCode exit_code(const Outcome& outcome, const Judgement& judgement) {
  const bool contradicted = outcome.sweep && !outcome.sweep->contradictions.empty();
  if (judgement.expectation && !contradicted) {
    if (outcome.path) return from_comparison(compare(*judgement.expectation, *outcome.path));
    if (outcome.bracket) return from_comparison(compare(*judgement.expectation, *outcome.bracket));
    if (outcome.audit) return from_comparison(compare(*judgement.expectation, *outcome.audit));
    if (outcome.check) return from_comparison(compare(*judgement.expectation, *outcome.check));
    if (outcome.count) return from_comparison(compare(*judgement.expectation, *outcome.count));
  }
  ExitCode code = kExitGood;
  if (outcome.check)
    code = outcome.command == "locate" ? code_of_location(outcome) : code_of_check(*outcome.check);
  if (outcome.count)
    code = outcome.sweep ? code_of_sweep(*outcome.count, *outcome.sweep) : code_of_count(*outcome.count);
  if (outcome.bracket) code = code_of_bracket(*outcome.bracket);
  if (outcome.audit) code = code_of_audit(*outcome.audit);
  if (outcome.path) code = code_of_path(*outcome.path);
  return code == kExitGood && judgement.symmetric_part ? kExitNotGood : code;
}

}  // namespace stanchion
