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

  double shift_of(double theta) const { return 1 / theta - tau; }
  double theta_of(double shift) const { return 1 / (shift + tau); }
};

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
