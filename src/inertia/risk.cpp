#include "inertia/risk.hpp"

#include <cmath>

namespace stanchion {

double RiskBudget::charge() {
  ++attempts_;
  const double j = attempts_;
  const double share = 6 / (M_PI * M_PI * j * j) * risk_ * (1 - 0x1p-40);
  spent_ += share;
  return share;
}

double small_ball(double failure, Index vectors) {
  // erf(g / sqrt 2) <= sqrt(2 / pi) g for every g, so this g errs on the safe side.
  return std::pow(failure, 1.0 / vectors) * std::sqrt(M_PI / 2) * (1 - 1e-12);
}

}  // namespace stanchion
