#include "inertia/risk.hpp"

#include <cmath>

namespace stanchion {

double event_share(double risk, Index number) {
  const double j = number;
  return 6 / (M_PI * M_PI * j * j) * risk * (1 - 0x1p-40);
}

double RiskBudget::charge() {
  const double share = event_share(risk_, ++attempts_);
  spent_ += share;
  charges_.push_back(share);
  return share;
}

double small_ball(double failure, Index vectors) {
  // erf(g / sqrt 2) <= sqrt(2 / pi) g for every g, so this g errs on the safe side.
  return std::pow(failure, 1.0 / vectors) * std::sqrt(M_PI / 2) * (1 - 1e-12);
}

}  // namespace stanchion
