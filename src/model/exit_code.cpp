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
  const bool open = std::any_of(directions.begin(), directions.end(),
                                [](const Direction& direction) { return direction.cause == Cause::kUnresolved; });
  if (open) return kExitUnresolved;
  return directions.empty() && outcome.located->not_located == 0 ? kExitGood : kExitNotGood;
}

ExitCode code_of_count(const CountOutcome& count) {
  const bool all = std::all_of(count.counts.begin(), count.counts.end(), [](const ShiftCount& shift) {
    return shift.below.has_value() && shift.level != Level::kNone;
  });
  return all ? kExitGood : kExitUnresolved;
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
  if (judgement.expectation) {
    if (outcome.check) return from_comparison(compare(*judgement.expectation, *outcome.check));
    if (outcome.count) return from_comparison(compare(*judgement.expectation, *outcome.count));
  }
  ExitCode code = kExitGood;
  if (outcome.check) code = outcome.command == "locate" ? code_of_location(outcome) : code_of_check(*outcome.check);
  if (outcome.count) code = code_of_count(*outcome.count);
  return code == kExitGood && judgement.symmetric_part ? kExitNotGood : code;
}

}  // namespace stanchion
