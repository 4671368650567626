// What a bracket is asked, in the pencil's own unit, and the values found so far.
#pragma once

#include <optional>
#include <vector>

#include "engine/pencil_counter.hpp"
#include "spectrum/residual_intervals.hpp"

namespace stanchion {

/// A range of values; an open end is absent. For factors 0 is an end like any other.
struct ValueRange {
  std::optional<double> low, high;
};

/// Values that certainly lie in [low, high], as many as `count`, once the range is shown complete.
struct FoundValues {
  double low = 0, high = 0, value = 0;
  Index count = 1;
  Level level = Level::kNone;
  double failure_probability = 0;
  const char* proof = "counts";
  std::vector<Mode> modes;
};

/// What several statements rest on is counted once: none fails with more than the document has spent in all.
void within_document(std::optional<double>& failure_probability, const Outcome& outcome);

/// All that was found, ascending, and the range that the counts at its ends show complete.
struct FoundRange {
  std::vector<FoundValues> values;
  std::optional<CountedRange> complete;
  bool none_at_zero = false;  ///< an exact count at 0 shows that no value is 0
};

/// The range that counts can speak of: where they are of the values between 0 and a shift, whatever the
/// pencil, a range without a lower end begins or ends at 0. `counter` is judged; the range has an upper end.
ValueRange countable(const PencilCounter& counter, const ValueRange& range);

/// A counted range from two facts; level and failure probability of both.
CountedRange counted_range(const std::optional<CountFact>& low, const CountFact& high, double from,
                           double to);

}  // namespace stanchion
