// What a forecast says of the way a matrix is best certified.
#pragma once

#include "symbolic/analysis.hpp"

namespace stanchion {

/// Operations for every entry of L up to which passes over L cost as much as finding it.
constexpr double kThinOperations = 700;

/// True for factors of surfaces and lines, with few operations for every entry of L: a second factorization
/// that is thrown away costs no more than the passes over one that is kept, and its error is small. Plates of
/// 50,000 unknowns have about 150, solids, frames and saddle points of 20,000 to 30,000 some 900 to 1,000.
inline bool has_thin_factor(const StructureForecast& forecast) {
  return forecast.front_flops <= kThinOperations * static_cast<double>(forecast.stored_factor_entries);
}

}  // namespace stanchion
