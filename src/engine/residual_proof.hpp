// What certified counts and residual intervals show together: values in groups, and that there are no others.
#pragma once

#include <optional>
#include <utility>
#include <vector>

#include "engine/bracket_question.hpp"
#include "engine/spectral_base.hpp"

namespace stanchion {

/// Groups of pairs by the side of zero their theta is on: they come from different ends of the spectrum.
struct GroupSides {
  std::vector<EigenvalueGroup> above, below;
  static Offset number(const std::vector<EigenvalueGroup>& groups) {
    Offset sum = 0;
    for (const EigenvalueGroup& group : groups) sum += static_cast<Offset>(group.pairs.size());
    return sum;
  }
};

/// Refers to all it is given. Every count is remembered in `counts`, and contradictions among them are
/// errors.
class ResidualProof {
 public:
  ResidualProof(PencilCounter& counter, const Request& request, Outcome& outcome, Staircase& counts)
      : counter_(counter), request_(request), outcome_(outcome), counts_(counts) {}

  /// The base that pairs are of from now on; before that there are counts only.
  void stand_on(const SpectralBase& base) { base_ = &base; }

  /// Nothing where no count is certified.
  Result<std::optional<CountFact>> count_at(double shift);

  /// The number at `shift`, when so many as `expected` were shown on its side already: no more than that is
  /// then all that is left to show. Otherwise it is counted. `next`: an estimate of the theta of the value
  /// behind the shift, by which, with `pairs` before it, the room to count in is judged; 0 where unknown.
  Result<std::optional<CountFact>> count_expecting(double shift, Offset expected,
                                                   const std::vector<ResidualPair>& pairs, double next);

  /// Whether the interval of a value holds `end`: it cannot tell on which side the value lies.
  bool held_by_one(const std::vector<ResidualPair>& pairs, double end) const;

  /// Those whose values lie between `from` and `to` for certain.
  GroupSides groups_inside(const std::vector<ResidualPair>& pairs, double from, double to) const;

  /// The groups inside (from, to), when they are all that the counts at the two ends say there is. Too many
  /// would contradict a certified count: a fault.
  Result<std::optional<FoundRange>> settle(const std::vector<ResidualPair>& pairs,
                                           const std::optional<CountFact>& low, const CountFact& high,
                                           double from, double to) const;

 private:
  std::pair<double, double> values_of(const EigenvalueGroup& group) const;
  Result<std::optional<CountFact>> remember(const CountFact& fact);
  std::optional<double> room_at(double shift, const std::vector<ResidualPair>& pairs, double next) const;
  FoundValues found_of(const std::vector<ResidualPair>& pairs, const EigenvalueGroup& group) const;
  void sharpen_all(const std::vector<ResidualPair>& pairs, double from, double to, GroupSides& sides) const;

  PencilCounter& counter_;
  const Request& request_;
  Outcome& outcome_;
  Staircase& counts_;
  const SpectralBase* base_ = nullptr;
};

/// Of a complete range of values on both sides of 0, the ones nearest to it: at least `wanted`, and what is
/// not told apart from the last of them; all where there are no more. What is left out bounds the range.
FoundRange nearest_of(FoundRange all, Index wanted);

/// Of a complete range the values that lie, or may lie, between `from` and `to`, both inside it. The range
/// ends there again unless one may lie on either side: then it ends behind that. `on_ends`: how many may.
FoundRange cut_to(FoundRange all, double from, double to, Index& on_ends);

/// Of a complete range with exact counts at its ends, `outer_low` and `outer_high`, what lies between two
/// counts inside it, exact as well: they tell on which side of an end a value lies whose interval holds that
/// end. A fault where the intervals and the counts contradict each other. An end without a count is that of
/// both ranges.
Result<FoundRange> cut_by_counts(FoundRange all, const std::optional<CountFact>& outer_low,
                                 const CountFact& outer_high, const std::optional<CountFact>& low,
                                 const CountFact& high);

/// A complete range that ends at 0, and one that begins there.
FoundRange joined(FoundRange below, FoundRange above);

}  // namespace stanchion
