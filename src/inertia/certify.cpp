#include "inertia/certify.hpp"

#include <algorithm>

namespace stanchion {
namespace {

void add_cost(CertifiedInertia& total, const CertifiedInertia& more) {
  total.factorizations += more.factorizations;
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

bool relative_allowed(const Analysis& analysis, const CertifyOptions& options) {
  return options.risk != nullptr && !options.offsets.resolution && options.offsets.data_error == 0 &&
         analysis.tree.rows > 0 && single_bytes(analysis.forecast) <= options.most_factor_bytes;
}

/// One factorization with the factor kept, and the test. Level none when it does not pass.
Result<CertifiedInertia> by_relative_test(const Analysis& analysis, const ShiftedMatrix& matrix,
                                          const CertifyOptions& options, ThreadPool& pool) {
  CertifiedInertia found;
  found.inertia.undecided = analysis.tree.rows;
  found.certificate.method = "relative";
  found.certificate.precision = "double";
  ShiftedMatrix unshifted = matrix;
  unshifted.offset = 0;
  FactorOptions factor_options = options.offsets.factor;
  factor_options.definite = false;
  factor_options.keep_factor = true;
  factor_options.store_single = analysis.forecast.peak_bytes_solve > options.most_factor_bytes;
  if (factor_options.store_single) found.certificate.precision = "single";
  auto factorization = factorize(analysis, unshifted, factor_options, pool);
  if (!factorization.ok()) return factorization.status();
  if (Status sound = check_fault(analysis, *factorization); !sound.ok()) return sound;
  found.factorizations = 1;
  found.seconds = factorization->seconds;
  found.delayed_pivots = factorization->delayed_pivots;
  found.two_by_two_pivots = factorization->two_by_two_pivots;
  found.peak_bytes = factorization->peak_bytes;
  if (factorization->breakdown) {
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
    found.unresolved_because = "the relative error of the factorization could not be bounded below 1";
    return found;
  }
  found.certificate.relative_bound = test->relative_bound;
  found.exclusion_radius = test->exclusion_radius;
  found.certificate.level = Level::kStatistical;
  found.inertia = {static_cast<Index>(test->negative), 0, static_cast<Index>(test->positive), 0};
  return found;
}

/// Below this many operations a second factorization costs less than anyone notices, and a proof says more.
constexpr double kProofIsCheap = 5e9;

bool proof_is_cheap(const Analysis& analysis) {
  return analysis.forecast.front_flops < kProofIsCheap;
}

class Certifier {
 public:
  Certifier(const Analysis& analysis, const ShiftedMatrix& matrix, const CertifyOptions& options,
            ThreadPool& pool)
      : analysis_(analysis), matrix_(matrix), options_(options), pool_(pool) {}

  Result<CertifiedInertia> run() {
    OffsetOptions offsets = options_.offsets;
    if (!relative_allowed(analysis_, options_)) return certify_by_offsets(analysis_, matrix_, offsets, pool_);
    if (offsets.definite_first) {
      offsets.definite_only = true;
      auto definite = certify_by_offsets(analysis_, matrix_, offsets, pool_);
      if (settled(definite)) return with_costs(std::move(definite));
      offsets.definite_only = offsets.definite_first = false;
    }
    if (proof_is_cheap(analysis_)) {
      auto both = certify_by_offsets(analysis_, matrix_, offsets, pool_);
      if (settled(both)) return with_costs(std::move(both));
      auto relative = by_relative_test(analysis_, matrix_, options_, pool_);
      if (settled(relative)) return with_costs(std::move(relative));
      return with_costs(std::move(both), false);
    }
    auto relative = by_relative_test(analysis_, matrix_, options_, pool_);
    if (settled(relative)) return with_costs(std::move(relative));
    return with_costs(certify_by_offsets(analysis_, matrix_, offsets, pool_));
  }

 private:
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
  const bool allowed = relative_allowed(analysis, options), two_first = !allowed || proof_is_cheap(analysis);
  const LikelyWork indefinite{two_first ? 2 : 1,
                              two_first && !allowed ? 0
                              : two_first           ? 1
                                                    : 2,
                              !two_first, allowed && two_first};
  if (!options.offsets.definite_first) return indefinite;
  return {1, indefinite.factorizations, false, indefinite.relative};
}

Result<CertifiedInertia> certify_inertia(const Analysis& analysis, const ShiftedMatrix& matrix,
                                         const CertifyOptions& options, ThreadPool& pool) {
  return Certifier(analysis, matrix, options, pool).run();
}

}  // namespace stanchion
