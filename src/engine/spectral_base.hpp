// The definite matrix from which values are found: K, or K + tau M where K is singular.
#pragma once

#include <functional>
#include <optional>

#include "engine/pencil_counter.hpp"
#include "spectrum/definite_base.hpp"

namespace stanchion {

/// C x = theta B x with B definite and its factor kept: a value of the pencil is 1 / theta - tau.
struct SpectralBase {
  DefiniteBase base;     ///< of K + tau M; tau 0: K
  ShiftedMatrix second;  ///< C: -G or G, or M, scaled
  double tau = 0;
  Index rigid = 0;  ///< zeros of a free body, as the count at 0 tells them apart from the rest
  std::optional<CountFact> at_zero = std::nullopt;  ///< that count, where one was made

  double shift_of(double theta) const { return 1 / theta - tau; }
  double theta_of(double shift) const { return 1 / (shift + tau); }
};

/// The same from K + sigma G where that is definite: values just beyond `sigma` then stand apart, where from
/// 0 they look alike. Nothing where it cannot be shown definite, or memory does not allow. K must be
/// definite, and `sigma` on the side that is asked about: no value lies between 0 and it then (convexity).
/// Cost: one kept factorization; of small models two, for a proof.
Result<std::optional<SpectralBase>> base_at(PencilCounter& counter, double sigma, ThreadPool& pool,
                                            Outcome& outcome);

/// A count at one shift, made once and remembered by whoever asks; nothing where none is certified.
using CountAt = std::function<Result<std::optional<CountFact>>(double shift)>;

/// Settles what counts mean, unless `counter` is judged already, and finds the base: K where it is definite;
/// else K + tau M, tau of the size of the lowest values that are not zero, or the origin that the counts have
/// (CountKind::kAbove). Nothing when counts are not of values, or no such matrix can be shown definite.
/// Errors: those of factoring. Cost: one kept factorization, for a free body two or three.
Result<std::optional<SpectralBase>> settle_base(PencilCounter& counter, const Request& request,
                                                const RunContext& context, const CountAt& count_at,
                                                ThreadPool& pool, Outcome& outcome);

}  // namespace stanchion
