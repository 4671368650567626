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

bool relative_allowed(const Analysis& analysis, const CertifyOptions& options) {
  return options.risk != nullptr && !options.offsets.resolution && options.offsets.data_error == 0 &&
         analysis.tree.rows > 0 && analysis.forecast.peak_bytes_solve <= options.most_factor_bytes;
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
  auto factorization = factorize(analysis, unshifted, factor_options, pool);
  if (!factorization.ok()) return factorization.status();
  found.factorizations = 1;
  found.seconds = factorization->seconds;
  found.delayed_pivots = factorization->delayed_pivots;
  found.two_by_two_pivots = factorization->two_by_two_pivots;
  found.peak_bytes = factorization->peak_bytes;
  if (factorization->breakdown) {
    found.unresolved_because = "the factorization broke down: entries overflow or no usable pivot is left";
    return found;
  }
  auto test = certify_relative(analysis, unshifted, *factorization, *options.risk, options.seed, pool);
  if (!test.ok()) return test.status();
  found.certify_seconds = test->seconds;
  found.certificate.failure_probability = test->failure_probability;
  found.certificate.error_bound = factorization->error_bound;
  if (!test->certified) {
    found.unresolved_because = "the relative error of the factorization could not be bounded below 1";
    return found;
  }
  found.certificate.relative_bound = test->relative_bound;
  found.certificate.level = Level::kStatistical;
  found.inertia = {static_cast<Index>(test->negative), 0, static_cast<Index>(test->positive), 0};
  return found;
}

}  // namespace

Result<CertifiedInertia> certify_inertia(const Analysis& analysis, const ShiftedMatrix& matrix,
                                         const CertifyOptions& options, ThreadPool& pool) {
  CertifiedInertia spent;
  OffsetOptions offsets = options.offsets;
  if (!relative_allowed(analysis, options)) return certify_by_offsets(analysis, matrix, offsets, pool);
  if (offsets.definite_first) {
    offsets.definite_only = true;
    auto definite = certify_by_offsets(analysis, matrix, offsets, pool);
    if (!definite.ok() || definite->certificate.level == Level::kProved) return definite;
    add_cost(spent, *definite);
    offsets.definite_only = false;
    offsets.definite_first = false;
  }
  auto relative = by_relative_test(analysis, matrix, options, pool);
  if (!relative.ok()) return relative.status();
  if (relative->certificate.level != Level::kNone) {
    add_cost(*relative, spent);
    return relative;
  }
  add_cost(spent, *relative);
  auto both = certify_by_offsets(analysis, matrix, offsets, pool);
  if (!both.ok()) return both.status();
  add_cost(*both, spent);
  return both;
}

}  // namespace stanchion
