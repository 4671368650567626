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
  const auto colon = text.find(':');
  const auto word = text.substr(0, colon);
  if (colon != std::string_view::npos && (word == "zero" || word == "negative")) {
    if (const auto number = whole_number(text.substr(colon + 1))) {
      return Expectation{word == "zero" ? Kind::kZero : Kind::kNegative, *number};
    }
  }
  return Status::bad_usage(
      "bad-expectation", fmt::format("'{}' is not an expectation", text), "--expect",
      "write positive-definite, zero:N or negative:N with a whole number N, e.g. zero:6");
}

Status check_applicable(const Expectation& expectation, Question question) {
  if (question == Question::kLocate) {
    return Status::bad_usage("expectation-not-applicable", "locate tells what it finds, and its exit code whether",
                             "--expect", "leave --expect out, or use it with check --locate");
  }
  if (question == Question::kForecast) {
    return Status::bad_usage("expectation-not-applicable", "a forecast gives no verdict to compare",
                             "--expect", "leave --expect out, or use it with check or count");
  }
  if (question == Question::kCount && expectation.kind == Kind::kZero) {
    return Status::bad_usage("expectation-not-applicable", "a count does not tell zero directions apart",
                             "--expect", "use negative:N or positive-definite with count, or ask check");
  }
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

}  // namespace stanchion
