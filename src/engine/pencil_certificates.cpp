// What a prepared pencil can show of its matrices, booked into the outcome.
#include <algorithm>
#include <cmath>

#include "base/counter_random.hpp"
#include "diagnose/diagnosis.hpp"
#include "engine/prepared_pencil.hpp"
#include "inertia/witness.hpp"
#include "sparse/scaling.hpp"

namespace stanchion {
namespace {

/// What the factorizations behind an inertia cost.
void book(const CertifiedInertia& certified, Outcome& outcome) {
  outcome.timings.factor += certified.seconds;
  outcome.work.factorizations += certified.factorizations;
  outcome.work.redone_in_double += certified.redone_in_double;
  outcome.work.delayed_pivots = std::max(outcome.work.delayed_pivots, certified.delayed_pivots);
  outcome.work.two_by_two_pivots = std::max(outcome.work.two_by_two_pivots, certified.two_by_two_pivots);
}

}  // namespace

Result<CertifiedInertia> PreparedPencil::run(const ShiftedMatrix& matrix, const OffsetOptions& options,
                                             ThreadPool& pool, Outcome& outcome) {
  auto found = run_on(matrix, {options, nullptr, seed_, bytes_for_factor()}, *risk_, 1, pool, outcome);
  if (found.ok() && found->single_hopeless && single_ == SingleUse::kWhereFaster) single_ = SingleUse::kNever;
  return found;
}

Result<CertifiedInertia> PreparedPencil::run_on(const ShiftedMatrix& matrix, const CertifyOptions& options,
                                                RiskBudget& risk, int share, ThreadPool& pool,
                                                Outcome& outcome) const {
  CertifyOptions certify_options = options;
  certify_options.risk = extended_ ? nullptr : &risk;
  certify_options.offsets.extended = extended_;
  certify_options.single = single_;
  const ShiftedMatrix second = second_alone();
  if (has_second_) certify_options.second = &second;
  const std::size_t charges_before = risk.charges().size();
  auto certified = certify_inertia(analysis_, matrix, certify_options, pool);
  if (!certified.ok()) return certified.status();
  outcome.risk = risk.spent();
  const auto& charges = risk.charges();
  for (std::size_t k = charges_before; k < charges.size();
       ++k) {  // one event an attempt: the last may have passed
    const bool passed = k + 1 == charges.size() && certified->certificate.level == Level::kStatistical;
    outcome.events.push_back(
        {has_second_ ? std::optional(matrix.coefficients.back()) : std::nullopt, charges[k], passed});
  }
  outcome.timings.certify += certified->certify_seconds;
  if (certified->certify_seconds > 0) {  // a factor was kept
    const PeakBytes peak = peak_bytes(analysis_, pool.size());
    // Where memory is short L alone may be in single precision, and the fronts in double.
    const bool single =
        certified->certificate.precision == "single" &&
        (certify_options.single == SingleUse::kOnly || peak.solve <= certify_options.most_factor_bytes);
    outcome.memory.forecast =
        std::max(outcome.memory.forecast,
                 resident_before_ + share * with_allowance(single ? peak.single : peak.solve));
  }
  book(*certified, outcome);
  return certified;
}

Result<CertifiedInertia> PreparedPencil::certify_apart(double factor, bool definite_first, double data_error,
                                                       Index number, int share, ThreadPool& pool,
                                                       Outcome& scratch) const {
  CertifyOptions options;
  options.offsets.definite_first = definite_first;
  options.offsets.resolution = resolution_;
  options.offsets.data_error = data_error;
  options.offsets.factor = factor_options_;
  options.offsets.factor.progress = nullptr;  // never from two at once
  if (options.offsets.factor.memory_cap_bytes) *options.offsets.factor.memory_cap_bytes /= share;
  options.most_factor_bytes = bytes_for_factor() / share;
  options.seed = CounterRandom::combine(seed_, static_cast<std::uint64_t>(number));
  RiskBudget risk(event_share(risk_->total(), number));
  return run_on(combination(factor), options, risk, share, pool, scratch);
}

void PreparedPencil::merge(const Outcome& scratch, Outcome& outcome) {
  outcome.timings.factor += scratch.timings.factor;
  outcome.timings.certify += scratch.timings.certify;
  outcome.memory.forecast = std::max(outcome.memory.forecast, scratch.memory.forecast);
  outcome.work.factorizations += scratch.work.factorizations;
  outcome.work.redone_in_double += scratch.work.redone_in_double;
  if (scratch.work.redone_in_double > 0 && single_ == SingleUse::kWhereFaster) single_ = SingleUse::kNever;
  outcome.work.delayed_pivots = std::max(outcome.work.delayed_pivots, scratch.work.delayed_pivots);
  outcome.work.two_by_two_pivots = std::max(outcome.work.two_by_two_pivots, scratch.work.two_by_two_pivots);
  outcome.warnings.insert(outcome.warnings.end(), scratch.warnings.begin(), scratch.warnings.end());
  outcome.events.insert(outcome.events.end(), scratch.events.begin(), scratch.events.end());
  risk_->take(scratch.risk);
  outcome.risk = risk_->spent();
}

Result<CertifiedInertia> PreparedPencil::certify(double factor, bool definite_first, double data_error,
                                                 ThreadPool& pool, Outcome& outcome) {
  OffsetOptions options;
  options.definite_first = definite_first;
  options.resolution = resolution_;
  options.data_error = data_error;
  options.factor = factor_options_;
  return run(combination(factor), options, pool, outcome);
}

Result<CertifiedInertia> PreparedPencil::certify_positive_side(double factor, Index all_but,
                                                               std::optional<double> offset, ThreadPool& pool,
                                                               Outcome& outcome) {
  OffsetOptions options;
  options.resolution = offset;
  options.all_positive_but = all_but;
  options.factor = factor_options_;
  auto found = certify_by_offsets(analysis_, combination(factor), options, pool);
  if (found.ok()) book(*found, outcome);
  return found;
}

Result<CertifiedInertia> PreparedPencil::certify_keeping(std::optional<double> resolution, double data_error,
                                                         std::optional<KeptFactorization>& kept,
                                                         ThreadPool& pool, Outcome& outcome) {
  // Whoever keeps the factor to locate holds vectors beside it; how many is known once the inertia is.
  const Offset vectors = diagnosis_bytes(analysis_.tree.rows, 0, 0, {});
  const Offset needed = std::max(analysis_.forecast.peak_bytes_solve,
                                 analysis_.forecast.stored_factor_entries * Offset{sizeof(double)} + vectors);
  if (needed > bytes_for_factor()) {
    return cannot_keep_factor(needed, outcome);
  }
  OffsetOptions options;
  options.resolution = resolution ? resolution : resolution_;
  options.data_error = data_error;
  options.sharpen = false;
  options.keep = &kept;
  options.factor = factor_options_;
  auto certified = certify_by_offsets(analysis_, combination(0), options, pool);
  if (!certified.ok()) return certified.status();
  outcome.memory.forecast = std::max(outcome.memory.forecast, resident_before_ + with_allowance(needed));
  book(*certified, outcome);
  return certified;
}

Result<CertifiedInertia> PreparedPencil::certify_second(std::optional<int> digits, ThreadPool& pool,
                                                        Outcome& outcome) {
  ShiftedMatrix matrix = second_alone();
  auto scale = power_of_two_scaling(family_, matrix.coefficients);
  if (!scale.ok()) return scale.status();
  matrix.scale = &*scale;
  OffsetOptions options;
  options.definite_first = true;
  options.factor = factor_options_;
  if (digits) options.data_error = digits_error(matrix, *digits);
  auto found = run(matrix, options, pool, outcome);
  if (!found.ok() || !found->certificate.smallest_eigenvalue_above) return found;
  // S M S = (S S'^-1) (S' M S') (S'^-1 S) >= min (s_i / s'_i)^2 mu' I; the ratios are powers of two.
  double least = INFINITY;
  for (Index i = 0; i < family_.rows; ++i) least = std::min(least, scale_[i] / (*scale)[i]);
  second_bound_ = *found->certificate.smallest_eigenvalue_above * least * least;
  return found;
}

Result<std::optional<Witness>> PreparedPencil::find_witness(const std::vector<Index>& original,
                                                            Index file_rows, ThreadPool& pool,
                                                            Outcome& outcome) {
  FactorOptions options = factor_options_;
  options.keep_factor = true;
  const ShiftedMatrix matrix = combination(0);
  auto factorization = factorize(analysis_, matrix, options, pool);
  if (!factorization.ok()) return factorization.status();
  if (Status sound = check_fault(analysis_, *factorization); !sound.ok()) return sound;
  ++outcome.work.factorizations;
  outcome.timings.factor += factorization->seconds;
  if (factorization->breakdown) return std::optional<Witness>{};
  const auto direction = find_negative_direction(analysis_, matrix, *factorization, pool);
  if (!direction) return std::optional<Witness>{};
  Witness witness{std::vector<double>(static_cast<std::size_t>(file_rows), 0.0), direction->quadratic_form,
                  direction->error_bound};
  for (Index p = 0; p < analysis_.tree.rows; ++p) {
    const Index equation = analysis_.tree.equation_at[p];
    const Index in_file = original.empty() ? equation : original[static_cast<std::size_t>(equation)];
    witness.x[static_cast<std::size_t>(in_file)] = direction->x[static_cast<std::size_t>(p)];
  }
  return std::optional<Witness>(std::move(witness));
}

}  // namespace stanchion
