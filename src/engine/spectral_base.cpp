#include "engine/spectral_base.hpp"

#include <cmath>

#include "engine/mode_search.hpp"

namespace stanchion {
namespace {

/// Below this many operations one more factorization costs less than anyone notices, and a proof says more
/// than a test.
constexpr double kProofIsCheap = 2e9;
/// From a tau at which values behind the zeros are not seen to the next: they lie farther out than that.
constexpr double kStride = 1e10;
constexpr int kMostStrides = 4;

bool small(const PencilCounter& counter) {
  return counter.pencil().analysis().forecast.factor_flops < kProofIsCheap;
}

class BaseSettler {
 public:
  BaseSettler(PencilCounter& counter, const Request& request, const RunContext& context,
              const CountAt& count_at, ThreadPool& pool, Outcome& outcome)
      : counter_(counter),
        request_(request),
        context_(context),
        count_at_(count_at),
        pool_(pool),
        outcome_(outcome) {}

  Result<std::optional<SpectralBase>> run() {
    if (Status status = settle(); !status.ok()) return status;
    if (base_) base_->at_zero = at_zero_;
    return std::move(base_);
  }

 private:
  Status settle() {
    const bool factors = request_.pencil == Pencil::kGeometric;
    if ((!factors || small(counter_)) && counter_.kind() == CountKind::kDirections) {
      if (Status status = counter_.judge(); !status.ok()) return status;
      if (counter_.kind() == CountKind::kDirections) return {};
    }
    if (counter_.kind() == CountKind::kBelow) return settle_below();
    const double origin = counter_.origin();  // 0 unless K alone is not definite
    auto base = counter_.pencil().definite_base(counter_.factor_of(origin), counter_.stiffness_bound(),
                                                small(counter_), pool_, outcome_);
    if (!base.ok()) return base.status();
    if (*base) take(std::move(**base), -origin);
    if (counter_.kind() == CountKind::kAbove) return base_ ? settle_elastic() : Status{};
    if (counter_.kind() != CountKind::kDirections) return {};
    if (base_) {
      counter_.accept_definite(base_->base.certificate());
      return {};
    }
    return counter_.judge();
  }

  void take(DefiniteBase base, double tau) {
    base_.emplace(
        SpectralBase{std::move(base), counter_.pencil().second(-counter_.factor_of(1)), tau, rigid_});
  }

  /// K + tau M: tau = 0 where K is definite, else large enough, and of the size of the lowest values that are
  /// not zero.
  Status settle_below() {
    auto plain = try_tau(0);
    if (!plain.ok()) return plain.status();
    if (*plain) return {};
    double tau = counter_.pencil().size_ratio() * 1e-7;
    if (!(tau > 0) || !std::isfinite(tau)) return {};
    for (int k = 0; k < 8 && !base_; ++k, tau *= 64) {
      auto shifted = try_tau(tau);
      if (!shifted.ok()) return shifted.status();
    }
    if (!base_) return {};
    return settle_elastic();
  }

  /// The zeros of a free body are told apart, and tau becomes one of the size of what comes after them. With
  /// kAbove any tau will do: K - s M is definite at -tau and at the origin, so between them (convexity), and
  /// no value lies there.
  Status settle_elastic() {
    if (!at_zero_) {
      auto zero = count_at_(0);
      if (!zero.ok()) return zero.status();
      at_zero_ = *zero;
    }
    if (at_zero_) rigid_ = base_->rigid = static_cast<Index>(at_zero_->most - at_zero_->least);
    const Offset below = at_zero_ ? at_zero_->least : 0;
    return move_near_elastic(static_cast<std::size_t>(below + rigid_));
  }

  /// `before`: number of values below the first elastic one. Where nothing but those is seen, what comes
  /// after them is lost in their rounding (kNoise), and a larger tau shows it.
  Status move_near_elastic(std::size_t before) {
    const double began = base_->tau;
    for (int k = 0; k < kMostStrides; ++k) {
      auto elastic = first_elastic(before);
      if (!elastic.ok()) return elastic.status();
      const double tau = base_->tau, value = elastic->value_or(kStride * tau);
      if (!(value > 0) || (tau < 30 * value && tau > value / 1000)) return {};
      auto moved = move_to(value);
      if (!moved.ok()) return moved.status();
      if (*elastic) return {};
      if (!*moved) break;
    }
    if (base_->tau == began) return {};
    auto back = move_to(began);
    return back.ok() ? Status{} : back.status();
  }

  Result<bool> move_to(double tau) {
    std::optional<SpectralBase> old = std::move(base_);
    base_.reset();
    auto moved = try_tau(tau);
    if (moved.ok() && !*moved) base_ = std::move(old);
    return moved;
  }

  /// An estimate of value number `before` + 1; nothing where it is not seen.
  Result<std::optional<double>> first_elastic(std::size_t before) {
    ModeSearch search(counter_, *base_, request_, context_, pool_, outcome_);
    search.start(static_cast<Index>(before) + 4, {static_cast<Index>(before) + 8, 0});
    int looks = 0;
    auto done = search.iterate([&] { return ++looks == 2; });
    if (!done.ok()) return done.status();
    const Candidates found = search.candidates(Side::kPositive);
    if (found.list.size() <= before) return std::optional<double>{};
    return std::optional(base_->shift_of(found.list[before].theta));
  }

  /// K is not definite, and how many values lie below 0 and at it has been found with that.
  void remember_zero(const CertifiedInertia& found) {
    const auto warnings = outcome_.warnings.size();
    at_zero_ = counter_.fact(counter_.count_of(0, found));
    outcome_.warnings.resize(warnings);
  }

  Result<bool> try_tau(double tau) {
    double bound = 0;
    if (tau == 0 && small(counter_)) {
      auto found = counter_.inertia_at(0, true);
      if (!found.ok()) return found.status();
      bound = found->certificate.smallest_eigenvalue_above.value_or(0);
      if (!(bound > 0)) {
        remember_zero(*found);
        return false;
      }
    }
    auto base =
        counter_.pencil().definite_base(counter_.factor_of(-tau), bound, small(counter_), pool_, outcome_);
    if (!base.ok()) return base.status();
    if (!*base) return false;
    take(std::move(**base), tau);
    return true;
  }

  PencilCounter& counter_;
  const Request& request_;
  const RunContext& context_;
  const CountAt& count_at_;
  ThreadPool& pool_;
  Outcome& outcome_;
  std::optional<SpectralBase> base_;
  std::optional<CountFact> at_zero_;
  Index rigid_ = 0;
};

}  // namespace

Result<std::optional<SpectralBase>> base_at(PencilCounter& counter, double sigma, ThreadPool& pool,
                                            Outcome& outcome) {
  using Nothing = std::optional<SpectralBase>;
  // What is in use, the base that all began with as well, counts: a factorization by itself knows its own
  // only.
  const StructureForecast& forecast = counter.pencil().analysis().forecast;
  const Offset room = counter.pencil().free_bytes();
  if (forecast.peak_bytes_solve > room) return Nothing();
  const bool prove = small(counter) && forecast.peak_bytes_solve + forecast.peak_bytes_count <= room;
  auto base = counter.pencil().definite_base(counter.factor_of(sigma), 0, prove, pool, outcome);
  if (!base.ok()) {
    if (base.status().kind() == StatusKind::kResourceLimit) return Nothing();
    return base.status();
  }
  if (!*base) return Nothing();
  return Nothing(SpectralBase{std::move(**base), counter.pencil().second(-counter.factor_of(1)), -sigma, 0});
}

Result<std::optional<SpectralBase>> settle_base(PencilCounter& counter, const Request& request,
                                                const RunContext& context, const CountAt& count_at,
                                                ThreadPool& pool, Outcome& outcome) {
  return BaseSettler(counter, request, context, count_at, pool, outcome).run();
}

}  // namespace stanchion
