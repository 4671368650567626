// The failure probability of a whole document, spent event by event, before anything is drawn.
#pragma once

#include "stanchion/types.hpp"

namespace stanchion {

/// Charges the j-th statistical attempt 6 risk / (pi^2 j^2), so that any number of attempts together stay within the
/// risk, however later ones depend on the outcome of earlier ones (each draws fresh vectors). Refused attempts are
/// charged too. Not thread safe: one document, one budget.
class RiskBudget {
 public:
  /// `risk` in (0, 1). Goes on where earlier parts of the same document left off, with what they `spent` in how many
  /// `attempts`.
  explicit RiskBudget(double risk, double spent = 0, Index attempts = 0)
      : risk_(risk), spent_(spent), attempts_(attempts) {}

  /// Charges the next attempt and returns what it may fail with; its number is attempts() afterwards.
  double charge();

  double spent() const { return spent_; }
  double total() const { return risk_; }
  Index attempts() const { return attempts_; }

 private:
  double risk_, spent_;
  Index attempts_;
};

/// g with P(max over `vectors` of ||B x|| <= g ||B||) <= failure for standard Gaussian x and any matrix B: the largest
/// singular direction alone gives |N(0,1)| <= g with probability erf(g / sqrt 2) for each vector (Halko, Martinsson,
/// Tropp, SIAM Rev. 53 (2011), Lemma 4.1, with its exact constant). Rounded down.
double small_ball(double failure, Index vectors);

}  // namespace stanchion
