#include "model/value_claims.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>

#include "model/names.hpp"

namespace stanchion {
namespace {

constexpr Offset kAny = std::numeric_limits<Index>::max();

/// At least and at most so many values.
struct Number {
  Offset least = 0, most = kAny;
};

/// How far the numbers of the two allow both statements.
Agreement agreement_of(Offset claimed, const Number& found) {
  if (claimed < found.least || claimed > found.most) return Agreement::kContradicted;
  return found.least == claimed && found.most == claimed ? Agreement::kAgreed : Agreement::kNotRepeated;
}

std::string in_words(const Number& number) {
  if (number.most >= kAny) return number.least > 0 ? fmt::format("at least {}", number.least) : "no number";
  return number.least == number.most ? fmt::format("{}", number.least)
                                     : fmt::format("{} to {}", number.least, number.most);
}

/// What `found` says of the closed interval: values certainly inside, and those that may be.
Number number_in(double low, double high, const BracketOutcome& found) {
  Number number;
  Offset possible = 0;
  for (const CriticalValue& value : found.critical) {
    if (value.level == Level::kNone) continue;
    if (value.low >= low && value.high <= high) number.least += value.multiplicity;
    if (value.high >= low && value.low <= high) possible += value.multiplicity;
  }
  // That there are no others is known inside the range that was found complete.
  const auto& complete = found.complete;
  if (complete && complete->count && complete->from <= low && complete->to >= high) number.most = possible;
  return number;
}

/// The number of values below a shift, as residual_bound.md has it; nothing when the count is not one of
/// values.
std::optional<Number> below(const ShiftCount& count) {
  if (count.certificate.level == Level::kNone || count.meaning.find("directions") != std::string::npos)
    return std::nullopt;
  const auto [least, most] = count.below_range;
  if (count.shift < 0 && count.meaning.find("between") != std::string::npos)
    return Number{-Offset{most}, -Offset{least}};
  return Number{least, most};
}

Number number_between(const ShiftCount& low, const ShiftCount& high) {
  const auto from = below(low), to = below(high);
  if (!from || !to) return {};
  return {std::max<Offset>(0, to->least - from->most), std::max<Offset>(0, to->most - from->least)};
}

std::string interval_in_words(double low, double high) {
  return fmt::format("[{:.10g}, {:.10g}]", low, high);
}

ClaimComparison compared(std::optional<double> shift, std::string claimed, Offset many, const Number& found) {
  ClaimComparison comparison;
  comparison.shift = shift;
  comparison.agreement = agreement_of(many, found);
  comparison.claimed = std::move(claimed);
  comparison.found = in_words(found);
  if (comparison.agreement == Agreement::kContradicted) comparison.why = "the two numbers exclude each other";
  if (comparison.agreement == Agreement::kNotRepeated)
    comparison.why = "the second path does not say as much";
  return comparison;
}

bool same_range(const CountedRange& one, const CountedRange& other) {
  return one.from == other.from && one.to == other.to;
}

Number number_of(const std::optional<CountedRange>& found) {
  if (!found || !found->count || found->level == Level::kNone) return {};
  return {*found->count, *found->count};
}

/// Whether the second path says all there is to say of an interval.
bool settled(const CriticalValue& claimed, const BracketOutcome& found) {
  return agreement_of(claimed.multiplicity, number_in(claimed.low, claimed.high, found)) !=
         Agreement::kNotRepeated;
}

/// The range of `found` that speaks of the same stretch; null when none does.
const CountedRange* same_among(const CountedRange& claimed, const BracketOutcome& found) {
  for (const auto* range : {&found.complete, &found.other_side}) {
    if (*range && (*range)->count && same_range(claimed, **range)) return &**range;
  }
  return nullptr;
}

std::vector<CountedRange> counted_ranges(const BracketOutcome& bracket) {
  std::vector<CountedRange> ranges;
  for (const auto* range : {&bracket.complete, &bracket.other_side}) {
    if (*range && (*range)->count) ranges.push_back(**range);
  }
  return ranges;
}

std::string audit_in_words(const AuditOutcome& audit) {
  return fmt::format("{}: {} listed, {} counted", name_of(audit.verdict), audit.listed,
                     audit.range.count ? fmt::format("{}", *audit.range.count) : "not");
}

ClaimComparison compare_verdicts(const AuditOutcome& claimed, const AuditOutcome& found) {
  ClaimComparison comparison{{}, Agreement::kAgreed, audit_in_words(claimed), audit_in_words(found), {}};
  if (auto why = contradiction_within(claimed)) {
    comparison.agreement = Agreement::kContradicted;
    comparison.why = std::move(*why);
  } else if (claimed.verdict == AuditVerdict::kUnresolved || found.verdict == AuditVerdict::kUnresolved) {
    comparison.agreement = Agreement::kNotRepeated;
    comparison.why = "one of the two judges nothing";
  } else if (claimed.range.from != found.range.from || claimed.range.to != found.range.to) {
    comparison.agreement = Agreement::kNotRepeated;
    comparison.why = "the second path judges another range";
  } else if (claimed.listed != found.listed || claimed.outside != found.outside ||
             claimed.range.count != found.range.count || claimed.verdict != found.verdict) {
    comparison.agreement = Agreement::kContradicted;
    comparison.why = "the two exclude each other";
  }
  return comparison;
}

ClaimComparison compare_gap(const AuditGap& claimed, const AuditOutcome& found) {
  const auto words = [](const AuditGap& gap) {
    return fmt::format("{} listed, {} counted in {}", gap.listed, gap.counted,
                       interval_in_words(gap.low, gap.high));
  };
  ClaimComparison comparison{claimed.low, Agreement::kNotRepeated, words(claimed), "-",
                             "the second path finds no such gap"};
  for (const AuditGap& gap : found.gaps) {
    if (gap.low > claimed.high || gap.high < claimed.low) continue;
    if (gap.listed != claimed.listed || gap.counted != claimed.counted) continue;
    comparison.agreement = Agreement::kAgreed;
    comparison.found = words(gap);
    comparison.why.clear();
  }
  return comparison;
}

std::optional<std::string> contradiction_among(const std::vector<CriticalValue>& values) {
  const CriticalValue* before = nullptr;
  for (const CriticalValue& value : values) {
    if (!(value.low <= value.value && value.value <= value.high) || value.multiplicity < 1)
      return "the certificate contradicts itself: a value lies outside of its own interval";
    if (before != nullptr && value.low < before->high)
      return "the certificate contradicts itself: its intervals overlap";
    before = &value;
  }
  return std::nullopt;
}

}  // namespace

std::optional<std::string> contradiction_within(const BracketOutcome& bracket) {
  if (auto why = contradiction_among(bracket.critical)) return why;
  if (!bracket.complete || !bracket.complete->count) return std::nullopt;
  Offset sum = 0;
  for (const CriticalValue& value : bracket.critical) {
    sum += value.multiplicity;
    if (value.low < bracket.complete->from || value.high > bracket.complete->to)
      return "the certificate contradicts itself: a value lies outside of the range";
  }
  if (sum == *bracket.complete->count || (sum == 0 && bracket.none_below == false)) return std::nullopt;
  return "the certificate contradicts itself: its values do not add up to what the range holds";
}

std::optional<std::string> contradiction_within(const AuditOutcome& audit) {
  if (auto why = contradiction_among(audit.missing)) return why;
  if (audit.verdict == AuditVerdict::kUnresolved) return std::nullopt;
  bool missing = false, surplus = false;
  Offset difference = 0;
  for (const AuditGap& gap : audit.gaps) {
    missing = missing || gap.counted >= gap.listed;  // as many, but not those: one of each
    surplus = surplus || gap.counted <= gap.listed;
    difference += Offset{gap.counted} - gap.listed;
  }
  const AuditVerdict follows = missing && surplus ? AuditVerdict::kMissingAndSurplus
                               : missing          ? AuditVerdict::kMissing
                               : surplus          ? AuditVerdict::kSurplus
                                                  : AuditVerdict::kComplete;
  if (follows != audit.verdict || !audit.range.count || *audit.range.count - audit.listed != difference)
    return "the certificate contradicts itself: its gaps do not give its verdict";
  return std::nullopt;
}

std::vector<double> value_ends(const BracketOutcome& claimed, const BracketOutcome& found) {
  std::vector<double> ends;
  for (const CriticalValue& value : claimed.critical) {
    if (!settled(value, found)) ends.insert(ends.end(), {value.low, value.high});
  }
  for (const CountedRange& range : counted_ranges(claimed)) {
    if (same_among(range, found) == nullptr && std::isfinite(range.from))
      ends.insert(ends.end(), {range.from, range.to});
  }
  return ends;
}

std::vector<ClaimComparison> compare_brackets(const BracketOutcome& claimed, const BracketOutcome& found,
                                              std::span<const ShiftCount> at_ends) {
  std::vector<ClaimComparison> comparisons;
  if (auto why = contradiction_within(claimed))
    comparisons.push_back({{}, Agreement::kContradicted, "all values", "-", *why});
  if (claimed.critical.empty() && counted_ranges(claimed).empty()) {
    comparisons.push_back(
        {{}, Agreement::kNotRepeated, "nothing certified", "-", "the certificate claims nothing"});
  }
  const auto from_counts = [&] {
    if (at_ends.size() < 2) return Number{};
    const Number number = number_between(at_ends[0], at_ends[1]);
    at_ends = at_ends.subspan(2);
    return number;
  };
  for (const CriticalValue& value : claimed.critical) {
    const Number number = settled(value, found) ? number_in(value.low, value.high, found) : from_counts();
    comparisons.push_back(compared(
        value.value, fmt::format("{} in {}", value.multiplicity, interval_in_words(value.low, value.high)),
        value.multiplicity, number));
  }
  for (const CountedRange& range : counted_ranges(claimed)) {
    const CountedRange* same = same_among(range, found);
    Number number;
    if (same != nullptr) {
      number = number_of(*same);
    } else if (std::isfinite(range.from)) {
      number = from_counts();
    }
    comparisons.push_back(
        compared({}, fmt::format("{} between {:.10g} and {:.10g}", *range.count, range.from, range.to),
                 *range.count, number));
  }
  return comparisons;
}

std::vector<ClaimComparison> compare_audits(const AuditOutcome& claimed, const AuditOutcome& found) {
  std::vector<ClaimComparison> comparisons{compare_verdicts(claimed, found)};
  for (const AuditGap& gap : claimed.gaps) comparisons.push_back(compare_gap(gap, found));
  for (const CriticalValue& value : claimed.missing) {
    ClaimComparison& one = comparisons.emplace_back(ClaimComparison{
        value.value, Agreement::kNotRepeated,
        fmt::format("{} missing in {}", value.multiplicity, interval_in_words(value.low, value.high)), "-",
        "the second path brackets no such value"});
    for (const CriticalValue& other : found.missing) {
      if (other.high < value.low || other.low > value.high || other.multiplicity != value.multiplicity)
        continue;
      one.agreement = Agreement::kAgreed;
      one.found =
          fmt::format("{} missing in {}", other.multiplicity, interval_in_words(other.low, other.high));
      one.why.clear();
    }
  }
  return comparisons;
}

}  // namespace stanchion
