// What a forecast says of the way a matrix is best certified.
#pragma once

#include <cmath>

#include "symbolic/analysis.hpp"

namespace stanchion {

/// Operations for every entry of L, over the square root of the unknowns, of which surfaces stay below.
constexpr double kThinOperations = 1.3;
/// Operations from which the kind of a factor can be told.
constexpr double kTellingOperations = 1e8;

/// True for factors of surfaces and lines, with few operations for every entry of L: a second factorization
/// that is thrown away costs no more than the passes over one that is kept, and its error is small. Plates of
/// 50,000 to 600,000 unknowns have 0.4 to 1 of the measure; in volumes it grows: Laplacians of 8,000 have
/// 1.7, of 60,000 2.4, solids and frames of 20,000 to 30,000 about 4.
inline bool has_thin_factor(const Analysis& analysis) {
  const double flops = analysis.forecast.front_flops;
  return flops >= kTellingOperations &&
         flops <= kThinOperations * std::sqrt(static_cast<double>(analysis.tree.rows)) *
                      static_cast<double>(analysis.forecast.stored_factor_entries);
}

}  // namespace stanchion
