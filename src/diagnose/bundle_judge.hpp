// Bundles held against the matrix itself.
#pragma once

#include <vector>

#include "diagnose/evidence.hpp"
#include "diagnose/purify.hpp"

namespace stanchion {

struct Judged {
  double energy = 0;    ///< x^T A x / x^T diag(A) x, the one largest in size of the bundle's vectors
  double residual = 0;  ///< the largest || A x ||, x of unit length
};

/// Energy and residual of every bundle's vectors against the matrix itself, by one product in double-double
/// a pass: bundles of different parts share columns.
std::vector<Judged> judge(const Evidence& evidence, const std::vector<Bundle>& bundles);

}  // namespace stanchion
