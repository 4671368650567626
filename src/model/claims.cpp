#include "model/claims.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>

#include "model/claim_consistency.hpp"
#include "model/claim_facts.hpp"
#include "model/claim_intervals.hpp"
#include "model/names.hpp"

namespace stanchion {
namespace {

std::string in_words(const CheckOutcome& check) {
  if (check.certificate.level == Level::kNone) return "nothing certified";
  std::string text = fmt::format("{}: {}", name_of(check.verdict), in_words(check.inertia));
  if (!check.constrained) return text;
  if (check.constrained->inertia)
    return text + "; on the constraints " + in_words(*check.constrained->inertia);
  if (!check.constrained->negative_range) return text;
  const auto [least, most] = *check.constrained->negative_range;
  return fmt::format("{}; on the constraints {} to {} negative", text, least, most);
}

ClaimComparison contradicted(std::string why) {
  return {{}, Agreement::kContradicted, {}, {}, std::move(why)};
}
ClaimComparison not_repeated(std::string why) {
  return {{}, Agreement::kNotRepeated, {}, {}, std::move(why)};
}
ClaimComparison agreed() {
  return {{}, Agreement::kAgreed, {}, {}, {}};
}

/// Factorizations at one offset that give different numbers: an eigenvalue lies at it, or one of them is
/// wrong.
bool differ_at_an_offset(const Certificate& claimed, const Certificate& found) {
  return std::any_of(claimed.runs.begin(), claimed.runs.end(), [&](const OffsetRun& one) {
    return std::any_of(found.runs.begin(), found.runs.end(), [&](const OffsetRun& other) {
      return one.offset == other.offset && one.negative != other.negative;
    });
  });
}

/// The bound for K itself is that of the scaled matrix times a number that the scaling gives.
bool bounds_for_k_differ(const Certificate& claimed, const Certificate& found) {
  if (!claimed.smallest_eigenvalue_above || !claimed.smallest_eigenvalue_of_k_above) {
    return claimed.smallest_eigenvalue_of_k_above.has_value();
  }
  if (!found.smallest_eigenvalue_above || !found.smallest_eigenvalue_of_k_above) return false;
  const double from = *claimed.smallest_eigenvalue_of_k_above * *found.smallest_eigenvalue_above;
  const double to = *found.smallest_eigenvalue_of_k_above * *claimed.smallest_eigenvalue_above;
  return !(std::fabs(from - to) <= 1e-9 * std::fabs(to));
}

/// What scaled matrices that are alike allow to compare beyond signs.
std::optional<ClaimComparison> compare_factorizations(const Certificate& claimed, const Certificate& found) {
  if (cannot_both_be_true(facts_of_runs(claimed), facts_of_runs(found))) {
    return contradicted("the factorizations of the two exclude each other");
  }
  if (bounds_for_k_differ(claimed, found)) {
    return contradicted(
        "the bound on the smallest eigenvalue of K does not follow from that of the scaled matrix");
  }
  if (!differ_at_an_offset(claimed, found)) return std::nullopt;
  return not_repeated("factorizations at the same offset give different numbers");
}

/// Inertia against inertia, about 0 only.
ClaimComparison compare_signs(const Inertia& claimed, const Inertia& found, const std::string& where) {
  const Index rows = found.negative + found.zero + found.positive + found.undecided;
  const Facts facts = facts_of_inertia(claimed, {}, rows, true);
  if (cannot_both_be_true(facts, facts_of_inertia(found, {}, rows, true)) ||
      Offset{claimed.negative} + claimed.zero + claimed.positive + claimed.undecided != rows) {
    return contradicted(fmt::format("{}{} against {}", where, in_words(claimed), in_words(found)));
  }
  if (found.negative >= claimed.negative && found.positive >= claimed.positive) return agreed();
  return not_repeated(fmt::format("{}the second path decides less: {}", where, in_words(found)));
}

ClaimComparison compare_constrained(const ConstrainedOutcome& claimed, const ConstrainedOutcome& found) {
  if (claimed.rank && found.rank && *claimed.rank != *found.rank) {
    return contradicted(fmt::format("the rank of the constraints is {} and {}", *claimed.rank, *found.rank));
  }
  if (claimed.inertia && found.inertia)
    return compare_signs(*claimed.inertia, *found.inertia, "on the constraints ");
  if (claimed.inertia || claimed.rank)
    return not_repeated("the second path does not certify the rank of the constraints");
  if (!claimed.negative_range) return agreed();
  const auto range = found.inertia
                         ? std::pair{found.inertia->negative, found.inertia->negative + found.inertia->zero}
                         : found.negative_range.value_or(std::pair{0, std::numeric_limits<Index>::max()});
  if (range.first > claimed.negative_range->second || range.second < claimed.negative_range->first) {
    return contradicted("the ranges of negative directions on the constraints exclude each other");
  }
  if (range.first >= claimed.negative_range->first && range.second <= claimed.negative_range->second)
    return agreed();
  return not_repeated("the second path leaves a wider range on the constraints");
}

ClaimComparison compare_roundings(Verdict claimed, Verdict found) {
  if (claimed == found) return agreed();
  const auto negative = [](Verdict verdict) {
    return verdict == Verdict::kIndefinite || verdict == Verdict::kNegativeDefinite ||
           verdict == Verdict::kNegativeSemidefinite;
  };
  const bool clash = (claimed == Verdict::kPositiveDefinite && negative(found)) ||
                     (negative(claimed) && found == Verdict::kPositiveDefinite);
  const std::string why = fmt::format("for all roundings {} against {}", name_of(claimed), name_of(found));
  return clash ? contradicted(why) : not_repeated(why);
}

ClaimComparison compare_inertia(const CheckOutcome& claimed, const CheckOutcome& found, Index rows,
                                bool same_scaling) {
  if (claimed.certificate.level == Level::kNone) return not_repeated("the certificate claims nothing");
  if (auto why = contradiction_within(claimed, rows)) return contradicted(*why);
  if (found.certificate.level == Level::kNone) return not_repeated("the second path certifies nothing");
  Facts old_facts = facts_of_inertia(claimed.inertia, claimed.certificate, rows, !same_scaling);
  Facts new_facts = facts_of_inertia(found.inertia, found.certificate, rows, !same_scaling);
  if (same_scaling) {
    append(old_facts, facts_of_runs(claimed.certificate));
    append(new_facts, facts_of_runs(found.certificate));
  }
  if (cannot_both_be_true(old_facts, new_facts)) {
    return contradicted(fmt::format("{} against {}", in_words(claimed.inertia), in_words(found.inertia)));
  }
  if (same_scaling) {
    if (auto difference = compare_factorizations(claimed.certificate, found.certificate)) return *difference;
  }
  return compare_signs(claimed.inertia, found.inertia, "");
}

const ClaimComparison& worst_of(const std::vector<ClaimComparison>& parts) {
  return *std::max_element(
      parts.begin(), parts.end(),
      [](const ClaimComparison& a, const ClaimComparison& b) { return a.agreement < b.agreement; });
}

ClaimComparison compare_check(const CheckOutcome& claimed, const CheckOutcome& found, Index rows,
                              bool same_scaling) {
  std::vector<ClaimComparison> parts{compare_inertia(claimed, found, rows, same_scaling)};
  if (claimed.constrained) {
    parts.push_back(found.constrained ? compare_constrained(*claimed.constrained, *found.constrained)
                                      : not_repeated("the second path knows of no multipliers"));
  }
  if (claimed.verdict_for_digits) {
    parts.push_back(found.verdict_for_digits
                        ? compare_roundings(*claimed.verdict_for_digits, *found.verdict_for_digits)
                        : not_repeated("the second path did not ask about roundings"));
  }
  ClaimComparison result = worst_of(parts);
  result.claimed = in_words(claimed);
  result.found = in_words(found);
  return result;
}

std::string in_words(const ShiftCount& count) {
  if (count.certificate.level == Level::kNone) return "nothing certified";
  if (count.below_range.first == count.below_range.second) {
    const std::string number = fmt::format("{}", count.below_range.first);
    if (!count.no_eigenvalue_within) return number;
    return fmt::format("{}, none within {:.3g}", number, *count.no_eigenvalue_within);
  }
  return fmt::format("{} to {}", count.below_range.first, count.below_range.second);
}

ClaimComparison compare_count(const ShiftCount& claimed, const ShiftCount& found, Index rows,
                              bool same_scaling) {
  const auto [least, most] = claimed.below_range;
  if (claimed.certificate.level == Level::kNone)
    return not_repeated("the certificate claims nothing at this shift");
  if (auto why = contradiction_within(claimed, rows)) return contradicted(*why);
  if (found.certificate.level == Level::kNone)
    return not_repeated("the second path certifies nothing at this shift");
  if (claimed.meaning != found.meaning) {
    return not_repeated(fmt::format("the second path counts something else: {}", found.meaning));
  }
  if (found.below_range.first > most || found.below_range.second < least) {
    return contradicted(fmt::format("{} against {}", in_words(claimed), in_words(found)));
  }
  if (same_scaling) {
    if (auto difference = compare_factorizations(claimed.certificate, found.certificate)) return *difference;
  }
  if (found.below_range.first >= least && found.below_range.second <= most) return agreed();
  return not_repeated(fmt::format("the second path leaves a wider range: {}", in_words(found)));
}

/// What was said of all counts together must be said again; word for word, for it follows from numbers.
std::vector<ClaimComparison> compare_sentences(const CountOutcome& claimed, const CountOutcome& found) {
  std::vector<ClaimComparison> missing;
  for (const std::string& sentence : claimed.sentences) {
    if (std::find(found.sentences.begin(), found.sentences.end(), sentence) != found.sentences.end())
      continue;
    missing.push_back({{}, Agreement::kNotRepeated, sentence, "-", "the second path does not say so"});
  }
  return missing;
}

}  // namespace

std::vector<double> interval_ends(const Outcome& claimed, const Outcome& found) {
  std::vector<double> ends;
  if (!claimed.count || !found.count) return ends;
  const std::size_t many = std::min(claimed.count->counts.size(), found.count->counts.size());
  for (std::size_t k = 0; k < many; ++k) {
    const auto interval = open_interval(claimed.count->counts[k], found.count->counts[k]);
    if (interval) ends.insert(ends.end(), {interval->first, interval->second});
  }
  return ends;
}

std::vector<ClaimComparison> compare_claims(const Outcome& claimed, const Outcome& found,
                                            std::span<const ShiftCount> at_ends) {
  const bool same_scaling = !claimed.scaling_sha256.empty() && claimed.scaling_sha256 == found.scaling_sha256;
  std::vector<ClaimComparison> comparisons;
  if (auto why = contradiction_within_risk(claimed)) {
    comparisons.push_back(
        {{}, Agreement::kContradicted, fmt::format("risk {:.3g}", claimed.risk), "-", *why});
  }
  if (claimed.check && found.check) {
    comparisons.push_back(compare_check(*claimed.check, *found.check, found.rows_analysed, same_scaling));
  }
  if (claimed.count && found.count) {
    const std::size_t many = std::min(claimed.count->counts.size(), found.count->counts.size());
    for (std::size_t k = 0; k < many; ++k) {
      const ShiftCount& old_count = claimed.count->counts[k];
      const ShiftCount& new_count = found.count->counts[k];
      std::vector<ClaimComparison> parts{
          compare_count(old_count, new_count, found.rows_analysed, same_scaling)};
      const bool looked = open_interval(old_count, new_count).has_value() && at_ends.size() >= 2;
      parts.push_back(compare_intervals(old_count, new_count, looked ? &at_ends[0] : nullptr,
                                        looked ? &at_ends[1] : nullptr));
      if (looked) at_ends = at_ends.subspan(2);
      ClaimComparison comparison = worst_of(parts);
      comparison.shift = old_count.shift;
      comparison.claimed = in_words(old_count);
      comparison.found = in_words(new_count);
      comparisons.push_back(std::move(comparison));
    }
    for (ClaimComparison& missing : compare_sentences(*claimed.count, *found.count)) {
      comparisons.push_back(std::move(missing));
    }
  }
  return comparisons;
}

Agreement worst(const std::vector<ClaimComparison>& comparisons) {
  if (comparisons.empty()) return Agreement::kNotRepeated;
  return worst_of(comparisons).agreement;
}

std::vector<double> telling_resolutions(const Certificate& claimed, const Certificate& found) {
  if (!claimed.resolution || !claimed.error_bound) return {};
  const double old_error = *claimed.error_bound, new_error = found.error_bound.value_or(old_error);
  std::vector<double> resolutions{*claimed.resolution + old_error + 4 * std::max(old_error, new_error)};
  const double finer = *claimed.resolution - old_error - 2 * new_error;
  if (finer > 1.5 * new_error) resolutions.push_back(finer);
  return resolutions;
}

}  // namespace stanchion
