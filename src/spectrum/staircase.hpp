// The staircase of a spectrum: what certified counts at single shifts say about the values between them.
//
// n(x) is the number of values below x, up to a constant: from minus infinity, or from 0 with values below 0
// counted negatively. It never falls. A count at a shift says least <= n(shift) <= most; when the two differ,
// the band around the shift holds the values number least + 1 to most, so n(band.low) <= least and
// n(band.high) >= most.
//
// Example: values 1, 2, 2, 5; counts n(0) = 0, n(1.5) = 1, n(3) = 3 and n(4) = 3 give the jumps [0, 1.5] with
// 1 value and [1.5, 3] with 2, and value number 3 lies in [1.5, 3].
#pragma once

#include <optional>
#include <utility>
#include <vector>

#include "stanchion/outcome.hpp"

namespace stanchion {

struct CountFact {
  double shift = 0;
  Offset least = 0, most = 0;
  std::optional<std::pair<double, double>> band;  ///< low <= shift <= high, where least < most
  Level level = Level::kNone;
  double failure_probability = 0;

  bool exact() const { return least == most; }
};

class Staircase {
 public:
  /// The fact at `shift` itself; null when there is none.
  const CountFact* at(double shift) const;

  void add(const CountFact& fact);

  /// In the order of shifts.
  const std::vector<CountFact>& facts() const { return facts_; }

  /// Pairs of facts that cannot both be true: more values below a smaller shift than below a larger one.
  std::vector<Contradiction> contradictions() const;

  /// Where n grows, ascending: between neighbouring shifts, and inside the bands of shifts that lie on
  /// values. Each value is counted in one stretch; stretches overlap where a band reaches into its
  /// neighbours, and may then hold more than is counted in them. Facts must not contradict each other.
  std::vector<Jump> jumps() const;

  /// Value number k (n grows from k - 1 to k): the tightest closed interval that the facts give, with what
  /// backs its two ends; nothing when one end is open.
  struct Bracket {
    double low = 0, high = 0;
    Level level = Level::kNone;
    double failure_probability = 0;
  };
  std::optional<Bracket> bracket(Offset number) const;

  /// Shifts that would tell more: the middle of each stretch between neighbouring shifts that holds more than
  /// one value and is wider than `width` times the larger size of its ends, and than `floor`. A band around a
  /// shift is not split: another shift in it would say no more.
  std::vector<double> splits(double width, double floor) const;

 private:
  std::vector<CountFact> facts_;
};

}  // namespace stanchion
