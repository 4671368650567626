#include "inertia/certify.hpp"

#include <algorithm>
#include <string>

#include "inertia/factor_kind.hpp"

namespace stanchion {
namespace {

void add_cost(CertifiedInertia& total, const CertifiedInertia& more) {
  total.factorizations += more.factorizations;
  total.redone_in_double += more.redone_in_double;
  total.single_hopeless = total.single_hopeless || more.single_hopeless;
  total.seconds += more.seconds;
  total.certify_seconds += more.certify_seconds;
  total.delayed_pivots = std::max(total.delayed_pivots, more.delayed_pivots);
  total.two_by_two_pivots = std::max(total.two_by_two_pivots, more.two_by_two_pivots);
  total.peak_bytes = std::max(total.peak_bytes, more.peak_bytes);
}

/// Memory of the numeric phase with L kept in single precision.
Offset single_bytes(const StructureForecast& forecast) {
  return forecast.peak_bytes_solve - forecast.stored_factor_entries * Offset{sizeof(double) - sizeof(float)};
}

/// Operations for every entry of L below which the passes over L, not the arithmetic, are most of the work.
/// Where elements fill a volume and L is much denser, the conditioning is milder, too. Solids, frames and
/// saddle points of 20,000 to 30,000 unknowns have about 900 to 1,000, a plate of 50,000 has 150.
constexpr double kOperationsAnEntry = 700;

bool single_is_faster(const StructureForecast& forecast) {
  return forecast.front_flops > kOperationsAnEntry * static_cast<double>(forecast.stored_factor_entries);
}

bool single_fits(const Analysis& analysis, const CertifyOptions& options) {
  return analysis.tree.rows > 0 && analysis.tree.rows <= kMostSingleRows &&
         analysis.forecast.peak_bytes_single <= options.most_factor_bytes;
}

bool relative_allowed(const Analysis& analysis, const CertifyOptions& options) {
  return options.risk != nullptr && !options.offsets.resolution && options.offsets.data_error == 0 &&
         analysis.tree.rows > 0 && single_bytes(analysis.forecast) <= options.most_factor_bytes;
}

/// A bound on ||F|| so far from 1 that no other vectors would bring it there.
constexpr double kHopelessBound = 10;

/// One factorization with the factor kept, and the test. Level none when it does not pass. `single`: computed
/// in single precision.
Result<CertifiedInertia> by_relative_test(const Analysis& analysis, const ShiftedMatrix& matrix,
                                          const CertifyOptions& options, bool single, ThreadPool& pool) {
  CertifiedInertia found;
  found.inertia.undecided = analysis.tree.rows;
  found.certificate.method = "relative";
  found.certificate.precision = "double";
  ShiftedMatrix unshifted = matrix;
  unshifted.offset = 0;
  FactorOptions factor_options = options.offsets.factor;
  factor_options.definite = false;
  factor_options.keep_factor = true;
  factor_options.single = single;
  factor_options.store_single = single || analysis.forecast.peak_bytes_solve > options.most_factor_bytes;
  if (factor_options.store_single) found.certificate.precision = "single";
  auto factorization = factorize(analysis, unshifted, factor_options, pool);
  if (!factorization.ok()) return factorization.status();
  if (Status sound = check_fault(analysis, *factorization); !sound.ok()) return sound;
  found.factorizations = 1;
  found.seconds = factorization->seconds;
  found.delayed_pivots = factorization->delayed_pivots;
  found.two_by_two_pivots = factorization->two_by_two_pivots;
  found.peak_bytes = factorization->peak_bytes;
  if (single) found.redone_in_double = 1;  // until it certifies itself
  if (factorization->breakdown) {
    found.single_hopeless = single;
    found.unresolved_because = "the factorization broke down: entries overflow or no usable pivot is left";
    return found;
  }
  auto test = certify_relative(analysis, unshifted, *factorization, *options.risk, options.seed, pool,
                               options.second);
  if (!test.ok()) return test.status();
  found.certify_seconds = test->seconds;
  found.certificate.failure_probability = test->failure_probability;
  found.certificate.error_bound = factorization->error_bound;
  if (!test->certified) {
    found.single_hopeless = single && !(test->relative_bound < kHopelessBound);
    found.unresolved_because = "the relative error of the factorization could not be bounded below 1";
    return found;
  }
  found.redone_in_double = 0;
  found.certificate.relative_bound = test->relative_bound;
  found.exclusion_radius = test->exclusion_radius;
  found.certificate.level = Level::kStatistical;
  found.inertia = {static_cast<Index>(test->negative), 0, static_cast<Index>(test->positive), 0};
  return found;
}

/// Below this many operations a second factorization costs less than anyone notices, and a proof says more;
/// with a thin factor it costs less than the test.
constexpr double kProofIsCheap = 5e9;

bool proof_is_cheap(const Analysis& analysis) {
  return analysis.forecast.front_flops < kProofIsCheap || has_thin_factor(analysis);
}

/// Where a bound that does not close costs less than what is gained when it does.
bool tries_single(const Analysis& analysis, const CertifyOptions& options) {
  if (options.single == SingleUse::kFirst) return single_fits(analysis, options);
  return options.single == SingleUse::kWhereFaster && single_is_faster(analysis.forecast) &&
         single_fits(analysis, options);
}

class Certifier {
 public:
  Certifier(const Analysis& analysis, const ShiftedMatrix& matrix, const CertifyOptions& options,
            ThreadPool& pool)
      : analysis_(analysis), matrix_(matrix), options_(options), pool_(pool) {}

  Result<CertifiedInertia> run() {
    if (options_.single == SingleUse::kOnly && analysis_.tree.rows > 0) return in_single_only();
    OffsetOptions offsets = options_.offsets;
    if (!relative_allowed(analysis_, options_)) return certify_by_offsets(analysis_, matrix_, offsets, pool_);
    const bool first = options_.single == SingleUse::kFirst && tries_single(analysis_, options_);
    if (first) {
      auto single = by_relative_test(analysis_, matrix_, options_, true, pool_);
      if (settled(single)) return with_costs(std::move(single));
    }
    if (offsets.definite_first) {
      offsets.definite_only = true;
      auto definite = certify_by_offsets(analysis_, matrix_, offsets, pool_);
      if (settled(definite)) return with_costs(std::move(definite));
      offsets.definite_only = offsets.definite_first = false;
    }
    if (proof_is_cheap(analysis_)) {
      auto both = certify_by_offsets(analysis_, matrix_, offsets, pool_);
      if (settled(both)) return with_costs(std::move(both));
      auto relative = by_relative_test(analysis_, matrix_, options_, false, pool_);
      if (settled(relative)) return with_costs(std::move(relative));
      return with_costs(std::move(both), false);
    }
    if (!first && tries_single(analysis_, options_)) {
      auto single = by_relative_test(analysis_, matrix_, options_, true, pool_);
      if (settled(single)) return with_costs(std::move(single));
    }
    auto relative = by_relative_test(analysis_, matrix_, options_, false, pool_);
    if (settled(relative)) return with_costs(std::move(relative));
    return with_costs(certify_by_offsets(analysis_, matrix_, offsets, pool_));
  }

 private:
  Result<CertifiedInertia> in_single_only() {
    if (options_.risk == nullptr) return Status::internal("single precision without a risk to charge");
    if (analysis_.tree.rows > kMostSingleRows) {
      return Status::bad_usage(
          "too-large-for-single",
          "single precision serves up to " + std::to_string(kMostSingleRows) + " unknowns", "--precision",
          "leave --precision out");
    }
    auto single = by_relative_test(analysis_, matrix_, options_, true, pool_);
    if (single.ok()) {
      if (single->redone_in_double > 0)
        single->unresolved_because += " in single precision; leave --precision out";
      single->redone_in_double = 0;  // nothing was
    }
    return single;
  }

  /// An answer without zero directions, or a failure; otherwise its cost is kept for the sum.
  bool settled(const Result<CertifiedInertia>& found) {
    if (!found.ok()) return true;
    if (found->certificate.level != Level::kNone && found->inertia.zero == 0) return true;
    add_cost(spent_, *found);
    return false;
  }

  /// Adds what earlier attempts cost; `own_cost_counted`: the answer's own cost is not among them yet.
  Result<CertifiedInertia> with_costs(Result<CertifiedInertia> found, bool own_cost_counted = true) {
    if (!found.ok()) return found;
    if (!own_cost_counted) found->factorizations = 0, found->seconds = 0, found->certify_seconds = 0;
    add_cost(*found, spent_);
    return found;
  }

  const Analysis& analysis_;
  const ShiftedMatrix& matrix_;
  const CertifyOptions& options_;
  ThreadPool& pool_;
  CertifiedInertia spent_;
};

}  // namespace

LikelyWork likely_work(const Analysis& analysis, const CertifyOptions& options) {
  if (options.single == SingleUse::kOnly) return {1, 0, true, false, true};
  const bool allowed = relative_allowed(analysis, options), two_first = !allowed || proof_is_cheap(analysis);
  const LikelyWork indefinite{two_first ? 2 : 1,
                              two_first && !allowed ? 0
                              : two_first           ? 1
                                                    : 2,
                              !two_first, allowed && two_first,
                              !two_first && tries_single(analysis, options)};
  LikelyWork likely = indefinite;
  if (likely.single) likely.more_if_not += 2;  // one in double takes as long as up to two
  if (!options.offsets.definite_first) return likely;
  return {1, indefinite.factorizations, false, indefinite.relative, false};
}

Result<CertifiedInertia> certify_inertia(const Analysis& analysis, const ShiftedMatrix& matrix,
                                         const CertifyOptions& options, ThreadPool& pool) {
  return Certifier(analysis, matrix, options, pool).run();
}

}  // namespace stanchion
