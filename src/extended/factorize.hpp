// The last resort: the same assembly tree factored in a longer scalar, for what double cannot tell apart.
#pragma once

#include "numeric/factorization.hpp"

namespace stanchion {

/// As factorize(), in double-double: counts, delays and a proved error bound (error_bound.md), of the order
/// of 10^-30 times the growth where factorize() gives 10^-15. The factor is not kept (options.keep_factor is
/// ignored). Carries the vector that detects faults of the machine. A pivot_threshold above 0.35 counts as
/// 0.35. Entries are formed from the data without a rounding to double. Same bits for any number of threads;
/// cap, progress and cancellation as there; same errors. Cost: see extended_seconds_forecast; memory twice
/// that of factorize() at most.
Result<Factorization> factorize_extended(const Analysis& analysis, const ShiftedMatrix& matrix,
                                         const FactorOptions& options, ThreadPool& pool);

/// The same code in plain double, with its own constants: slower than factorize(), and the means by which
/// tests hold the bound against errors that are large enough to be measured.
Result<Factorization> factorize_plainly(const Analysis& analysis, const ShiftedMatrix& matrix,
                                        const FactorOptions& options, ThreadPool& pool);

/// Seconds one factorize_extended() will take on this machine with the workers of `analysis`: its operations
/// over the speed of the innermost loop, which is timed here (about a millisecond), plus what a front costs
/// besides. Not reproducible.
double extended_seconds_forecast(const Analysis& analysis);

/// Most bytes of its numeric phase without delays.
Offset extended_peak_bytes_forecast(const Analysis& analysis);

}  // namespace stanchion
