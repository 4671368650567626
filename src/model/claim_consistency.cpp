#include "model/claim_consistency.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>

#include "model/claim_facts.hpp"
#include "model/names.hpp"

namespace stanchion {
namespace {

Verdict verdict_that_follows(const Inertia& inertia) {
  if (inertia.undecided > 0) return Verdict::kUnresolved;
  if (inertia.negative > 0 && inertia.positive > 0) return Verdict::kIndefinite;
  if (inertia.negative > 0)
    return inertia.zero > 0 ? Verdict::kNegativeSemidefinite : Verdict::kNegativeDefinite;
  return inertia.zero > 0 ? Verdict::kPositiveSemidefinite : Verdict::kPositiveDefinite;
}

/// The last factorization at this offset; null when there is none with a bound.
const OffsetRun* run_at(const Certificate& certificate, double offset) {
  const auto& runs = certificate.runs;
  const auto found = std::find_if(runs.rbegin(), runs.rend(), [&](const OffsetRun& run) {
    return run.offset == offset && run.error_bound.has_value();
  });
  return found == runs.rend() ? nullptr : &*found;
}

/// Numbers of eigenvalues that two offsets leave below and near zero; nothing when the runs do not say.
struct FromRuns {
  Index negative = 0, zero = 0;
};

std::optional<FromRuns> counts_from_runs(const Certificate& certificate) {
  if (!certificate.resolution) return std::nullopt;
  const OffsetRun* above = run_at(certificate, *certificate.resolution);
  const OffsetRun* below = run_at(certificate, -*certificate.resolution);
  if (above == nullptr || above->offset <= *above->error_bound) return std::nullopt;
  if (above->negative == 0) return FromRuns{};  // definite: one factorization is enough
  if (below == nullptr || -below->offset <= *below->error_bound) return std::nullopt;
  return FromRuns{below->negative, above->negative - below->negative};
}

/// The numbers that summarize a certificate must be those of its runs.
bool summary_fits(const Certificate& certificate) {
  double largest = 0;
  for (const OffsetRun& run : certificate.runs) largest = std::max(largest, run.error_bound.value_or(0));
  if (certificate.error_bound != largest) return false;
  if (!certificate.smallest_eigenvalue_above) return true;
  const OffsetRun* above = run_at(certificate, certificate.resolution.value_or(0));
  return above != nullptr && above->negative == 0 &&
         *certificate.smallest_eigenvalue_above <= above->offset - *above->error_bound;
}

/// How a level is reached: proofs by offsets, statistics by the relative test below its limit.
bool level_fits(const Certificate& certificate) {
  if (certificate.level == Level::kProved) return certificate.method == "offsets";
  return certificate.method == "relative" && certificate.relative_bound && *certificate.relative_bound < 1 &&
         certificate.failure_probability && certificate.runs.empty() &&
         !certificate.smallest_eigenvalue_above;
}

/// A count rests on its own certificate and may rest on others besides (of K or M): it is as sure or less.
bool no_surer(const ShiftCount& count, const Certificate& certificate) {
  if (count.level == Level::kProved) return certificate.level == Level::kProved && !count.failure_probability;
  return count.level == Level::kStatistical && certificate.level != Level::kNone &&
         count.failure_probability && *count.failure_probability > 0 &&
         *count.failure_probability >= certificate.failure_probability.value_or(0);
}

std::optional<std::string> contradiction_within(const Certificate& certificate) {
  if (!level_fits(certificate))
    return "the certificate contradicts itself: its method does not give its level";
  if (certificate.method != "offsets" || certificate.runs.empty() || summary_fits(certificate))
    return std::nullopt;
  return "the certificate contradicts itself: its bounds are not those of its factorizations";
}

}  // namespace

std::string in_words(const Inertia& inertia) {
  return fmt::format("{} negative, {} zero, {} positive", inertia.negative, inertia.zero, inertia.positive);
}

std::optional<std::string> contradiction_within(const CheckOutcome& check, Index rows) {
  const Inertia& i = check.inertia;
  if (Offset{i.negative} + i.zero + i.positive + i.undecided != rows) {
    return fmt::format("the certificate contradicts itself: {} in {} equations", in_words(i), rows);
  }
  if (check.verdict != verdict_that_follows(i)) {
    return fmt::format("the certificate contradicts itself: {} with {}", name_of(check.verdict), in_words(i));
  }
  if (auto why = contradiction_within(check.certificate)) return why;
  if (check.certificate.method != "offsets" || rows == 0) return std::nullopt;
  Facts all = facts_of_inertia(i, check.certificate, rows, false);
  append(all, facts_of_runs(check.certificate));
  const auto given = counts_from_runs(check.certificate);
  const bool fits = given && given->negative == i.negative && given->zero == i.zero;
  if (fits && !cannot_both_be_true(all, all)) return std::nullopt;
  return fmt::format("the certificate contradicts itself: its factorizations do not give {}", in_words(i));
}

std::optional<std::string> contradiction_within(const ShiftCount& count, Index rows) {
  const auto [least, most] = count.below_range;
  if (least > most || most > rows || (count.below && (*count.below != least || *count.below != most))) {
    return "the certificate contradicts itself: its count and its range do not agree";
  }
  const Certificate& certificate = count.certificate;
  if (count.method != certificate.method || (count.below && !no_surer(count, certificate)))
    return "the certificate contradicts itself: count and certificate are backed differently";
  if (auto why = contradiction_within(certificate)) return why;
  if (certificate.method != "offsets" || rows == 0) return std::nullopt;
  const Facts runs = facts_of_runs(certificate);
  const auto given = counts_from_runs(certificate);
  if (given && given->zero == most - least && !cannot_both_be_true(runs, runs)) return std::nullopt;
  return "the certificate contradicts itself: its factorizations do not give its range";
}

std::optional<std::string> contradiction_within_risk(const Outcome& outcome) {
  constexpr double kRounding = 1e-9;
  const auto wrong = [](const char* what) {
    return fmt::format("the certificate contradicts itself: {}", what);
  };
  double charged = 0, surest = std::numeric_limits<double>::infinity();
  for (const RiskEvent& event : outcome.events) {
    charged += event.charged;
    if (event.certified) surest = std::min(surest, event.charged);
  }
  if (std::fabs(charged - outcome.risk) > kRounding * outcome.risk) {
    return wrong("its attempts do not add up to the risk spent");
  }
  if (outcome.risk > outcome.risk_allowed * (1 + kRounding)) return wrong("more risk was spent than allowed");
  const auto fits = [&](Level level, const std::optional<double>& failure) {
    return level != Level::kStatistical ||
           (failure && *failure >= surest * (1 - kRounding) && *failure <= outcome.risk * (1 + kRounding));
  };
  bool all = !outcome.check ||
             fits(outcome.check->certificate.level, outcome.check->certificate.failure_probability);
  if (outcome.count) {
    for (const ShiftCount& count : outcome.count->counts) {
      all = all && fits(count.level, count.failure_probability) &&
            fits(count.certificate.level, count.certificate.failure_probability);
    }
  }
  const auto values_fit = [&](const std::vector<CriticalValue>& values) {
    return std::all_of(values.begin(), values.end(), [&](const CriticalValue& value) {
      return fits(value.level, value.failure_probability);
    });
  };
  if (outcome.bracket) {
    all = all && values_fit(outcome.bracket->critical);
    for (const auto* range : {&outcome.bracket->complete, &outcome.bracket->other_side})
      all = all && (!*range || fits((*range)->level, (*range)->failure_probability));
  }
  if (outcome.audit) {
    all = all && values_fit(outcome.audit->missing) &&
          fits(outcome.audit->range.level, outcome.audit->range.failure_probability);
  }
  if (all) return std::nullopt;
  return wrong("a failure probability is not that of its attempts");
}

}  // namespace stanchion
