// How fast this machine factors, measured in some hundredths of a second: for forecasts of time.
#pragma once

#include <array>

#include "symbolic/analysis.hpp"

namespace stanchion {

/// Not reproducible: another run, or a busier machine, measures otherwise.
struct HostRates {
  /// The elimination of one front by one thread.
  struct FrontTime {
    double flops = 0, seconds = 0;
  };
  std::array<FrontTime, 4> fronts{};    ///< ascending
  double seconds_per_front = 0;         ///< besides: assembling, booking, handing on
  double seconds_per_tested_entry = 0;  ///< of the relative test, per entry of L; one of the matrix counts as
                                        ///< kTestedEntriesPerDatum
};

/// An entry of the matrix is multiplied in double-double, one of L used in two solves.
constexpr double kTestedEntriesPerDatum = 6;

/// Times four fronts of different sizes with the kernels in use, and one small model from its factorization
/// to its relative test, in double or in single precision. Throws std::bad_alloc.
HostRates measure_host(bool single = false);

/// One factorization, in the precision that was measured, by `workers`.
double factorization_seconds(const Analysis& analysis, const HostRates& rates, int workers);

/// The relative test on a kept factor; `entries` of the matrix.
double relative_test_seconds(const Analysis& analysis, Offset entries, const HostRates& rates, int workers);

}  // namespace stanchion
