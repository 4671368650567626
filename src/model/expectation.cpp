#include "model/expectation.hpp"

#include <fmt/format.h>

#include <charconv>
#include <optional>
#include <utility>

namespace stanchion {
namespace {

using Kind = Expectation::Kind;

std::optional<Index> whole_number(std::string_view text) {
  Index number = 0;
  const auto [end, error] = std::from_chars(text.data(), text.data() + text.size(), number);
  if (error != std::errc{} || end != text.data() + text.size() || number < 0) return std::nullopt;
  return number;
}

/// Is a number known to lie in [least, most] equal to `wanted`?
Comparison compare_range(Index wanted, Index least, Index most) {
  if (wanted < least || wanted > most) return Comparison::kNotMet;
  return least == most ? Comparison::kMet : Comparison::kOpen;
}

/// Both must hold; a refutation of either decides.
Comparison both(Comparison a, Comparison b) {
  if (a == Comparison::kNotMet || b == Comparison::kNotMet) return Comparison::kNotMet;
  return a == Comparison::kMet && b == Comparison::kMet ? Comparison::kMet : Comparison::kOpen;
}

Comparison compare_inertia(const Expectation& expectation, const Inertia& inertia) {
  const auto range = [&](Index wanted, Index known) {
    return compare_range(wanted, known, known + inertia.undecided);
  };
  switch (expectation.kind) {
    case Kind::kPositiveDefinite:
      return both(range(0, inertia.negative), range(0, inertia.zero));
    case Kind::kZero:
      return both(range(0, inertia.negative), range(expectation.count, inertia.zero));
    case Kind::kNegative:
    case Kind::kNoneBelow:
    case Kind::kComplete:
      break;
  }
  return range(expectation.count, inertia.negative);
}

/// Only the range of negative directions on the constraints is known: it can refute, hardly ever confirm.
Comparison compare_negative_range(const Expectation& expectation, std::pair<Index, Index> range) {
  const Index wanted = expectation.kind == Kind::kNegative ? expectation.count : 0;
  const Comparison negative = compare_range(wanted, range.first, range.second);
  return expectation.kind == Kind::kNegative ? negative : both(negative, Comparison::kOpen);
}

}  // namespace

Result<Expectation> parse_expectation(std::string_view text) {
  if (text == "positive-definite") return Expectation{Kind::kPositiveDefinite, 0};
  if (text == "none-below") return Expectation{Kind::kNoneBelow, 0};
  if (text == "complete") return Expectation{Kind::kComplete, 0};
  const auto colon = text.find(':');
  const auto word = text.substr(0, colon);
  if (colon != std::string_view::npos && (word == "zero" || word == "negative")) {
    if (const auto number = whole_number(text.substr(colon + 1))) {
      return Expectation{word == "zero" ? Kind::kZero : Kind::kNegative, *number};
    }
  }
  return Status::bad_usage(
      "bad-expectation", fmt::format("'{}' is not an expectation", text), "--expect",
      "write positive-definite, zero:N or negative:N with a whole number N, e.g. zero:6; none-below with "
      "bracket, complete with audit");
}

Status check_applicable(const Expectation& expectation, Question question) {
  const auto refuse = [](const char* why, const char* remedy) {
    return Status::bad_usage("expectation-not-applicable", why, "--expect", remedy);
  };
  const Kind kind = expectation.kind;
  switch (question) {
    case Question::kLocate:
      return refuse("locate tells what it finds, and its exit code whether",
                    "leave --expect out, or use it with check --locate");
    case Question::kForecast:
      return refuse("a forecast gives no verdict to compare",
                    "leave --expect out, or use it with check or count");
    case Question::kBracket:
      if (kind == Kind::kNoneBelow) return {};
      return refuse("brackets can only be expected to hold no value", "write --expect none-below");
    case Question::kAudit:
      if (kind == Kind::kComplete) return {};
      return refuse("an audited list can only be expected to be complete", "write --expect complete");
    case Question::kCount:
    case Question::kSweep:
      if (kind == Kind::kZero) {
        return refuse("a count does not tell zero directions apart",
                      "use negative:N or positive-definite with count, or ask check");
      }
      break;
    case Question::kCheck:
      break;
  }
  if (kind == Kind::kNoneBelow)
    return refuse("this is an expectation of brackets", "use it with bracket --below B");
  if (kind == Kind::kComplete) return refuse("this is an expectation of an audit", "use it with audit");
  return {};
}

Comparison compare(const Expectation& expectation, const CheckOutcome& check) {
  if (check.certificate.level == Level::kNone) return Comparison::kOpen;
  if (check.constrained) {
    if (check.constrained->inertia) return compare_inertia(expectation, *check.constrained->inertia);
    if (!check.constrained->negative_range) return Comparison::kOpen;
    return compare_negative_range(expectation, *check.constrained->negative_range);
  }
  const Comparison answer = compare_inertia(expectation, check.inertia);
  // With --digits the expectation must hold for every matrix that rounds to the file.
  const bool doubtful = check.verdict_for_digits && *check.verdict_for_digits != check.verdict;
  return answer == Comparison::kMet && doubtful ? Comparison::kOpen : answer;
}

Comparison compare(const Expectation& expectation, const CountOutcome& count) {
  const Index wanted = expectation.kind == Kind::kNegative ? expectation.count : 0;
  Comparison answer = Comparison::kMet;
  for (const ShiftCount& shift : count.counts) {
    if (shift.level == Level::kNone) {
      answer = both(answer, Comparison::kOpen);
    } else {
      const auto least = shift.below.value_or(shift.below_range.first);
      const auto most = shift.below.value_or(shift.below_range.second);
      answer = both(answer, compare_range(wanted, least, most));
    }
  }
  return answer;
}

Comparison compare(const Expectation& expectation, const PathOutcome& path) {
  Comparison answer = Comparison::kMet;
  for (const PathStep& step : path.steps) {
    CheckOutcome check;
    check.verdict = step.verdict;
    check.inertia = step.inertia;
    check.certificate = step.certificate;
    answer = both(answer, compare(expectation, check));
  }
  return answer;
}

Comparison compare(const Expectation& /*none_below*/, const BracketOutcome& bracket) {
  if (!bracket.none_below) return Comparison::kOpen;
  return *bracket.none_below ? Comparison::kMet : Comparison::kNotMet;
}

Comparison compare(const Expectation& /*complete*/, const AuditOutcome& audit) {
  if (audit.verdict == AuditVerdict::kUnresolved) return Comparison::kOpen;
  return audit.verdict == AuditVerdict::kComplete ? Comparison::kMet : Comparison::kNotMet;
}

}  // namespace stanchion
