// The failure probability of a whole document, spent event by event, before anything is drawn.
#pragma once

#include <vector>

#include "stanchion/types.hpp"

namespace stanchion {

/// Charges the j-th statistical attempt 6 risk / (pi^2 j^2), so that any number of attempts together stay
/// within the risk, however later ones depend on the outcome of earlier ones (each draws fresh vectors).
/// Refused attempts are charged too. Not thread safe: one document, one budget.
class RiskBudget {
 public:
  /// `risk` in (0, 1). Goes on where earlier parts of the same document left off, with what they `spent` in
  /// how many `attempts`.
  explicit RiskBudget(double risk, double spent = 0, Index attempts = 0)
      : risk_(risk), spent_(spent), attempts_(attempts) {}

  /// Charges the next attempt and returns what it may fail with; its number is attempts() afterwards.
  double charge();

  /// Sets the next `events` attempts apart for parts with budgets of their own (see event_share); the number
  /// of the first.
  Index reserve(Index events) {
    attempts_ += events;
    return attempts_ - events + 1;
  }

  /// Books what a part of the document with a budget of its own has spent; event_share() keeps the sum within
  /// the risk.
  void take(double spent) { spent_ += spent; }

  /// What charge() has taken here, in order.
  const std::vector<double>& charges() const { return charges_; }

  double spent() const { return spent_; }
  double total() const { return risk_; }
  Index attempts() const { return attempts_; }

 private:
  double risk_, spent_;
  Index attempts_;
  std::vector<double> charges_;
};

/// What event `number` (from 1, each used once) of a document may fail with: 6 risk / (pi^2 number^2), so
/// that any number of events together stay within the risk. charge() gives the same to the attempts in their
/// order.
double event_share(double risk, Index number);

/// g with P(max over `vectors` of ||B x|| <= g ||B||) <= failure for standard Gaussian x and any matrix B:
/// the largest singular direction alone gives |N(0,1)| <= g with probability erf(g / sqrt 2) for each vector
/// (Halko, Martinsson, Tropp, SIAM Rev. 53 (2011), Lemma 4.1, with its exact constant). Rounded down.
double small_ball(double failure, Index vectors);

}  // namespace stanchion
