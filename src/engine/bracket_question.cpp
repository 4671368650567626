#include "engine/bracket_question.hpp"

#include <algorithm>

namespace stanchion {

void within_document(std::optional<double>& failure_probability, const Outcome& outcome) {
  if (failure_probability) *failure_probability = std::min(*failure_probability, outcome.risk);
}

ValueRange countable(const PencilCounter& counter, const ValueRange& range) {
  if (!counter.two_sided() || range.low) return range;
  return {std::min(0.0, *range.high), std::max(0.0, *range.high)};
}

CountedRange counted_range(const std::optional<CountFact>& low, const CountFact& high, double from,
                           double to) {
  CountedRange range{from, to, std::nullopt, Level::kProved, std::nullopt};
  double failure = 0;
  const auto take = [&](const CountFact& fact) {
    if (fact.level != Level::kStatistical) return;
    range.level = Level::kStatistical;
    failure += fact.failure_probability;
  };
  take(high);
  if (low) take(*low);
  if (range.level == Level::kStatistical) range.failure_probability = failure;
  const Offset below = low ? low->least : 0;
  if (high.exact() && (!low || low->exact())) range.count = static_cast<Index>(high.least - below);
  return range;
}

}  // namespace stanchion
