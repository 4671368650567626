#include "engine/other_side.hpp"

#include <algorithm>

#include "io/shortest.hpp"

namespace stanchion {

Result<std::optional<ShiftCount>> look_at_the_other_side(PencilCounter& counter, double lowest,
                                                         double highest, Outcome& outcome,
                                                         std::vector<std::string>& sentences) {
  if (lowest < 0 && highest > 0) return std::optional<ShiftCount>{};
  const double mirror = lowest < 0 ? -lowest : -highest;
  if (mirror == 0) return std::optional<ShiftCount>{};
  const auto warnings = outcome.warnings.size();
  auto other = counter.count(mirror);
  if (!other.ok()) return other.status();
  outcome.warnings.resize(warnings);
  say_other_side(*other, outcome, sentences);
  return std::optional<ShiftCount>(std::move(*other));
}

void say_other_side(const ShiftCount& other, Outcome& outcome, std::vector<std::string>& sentences) {
  const std::string span =
      other.shift < 0 ? number_text(other.shift) + " and 0" : "0 and " + number_text(other.shift);
  if (other.below == 0) {
    sentences.push_back("On the other side, between " + span + ", there is no critical factor.");
    return;
  }
  const std::string many =
      other.below ? std::to_string(*other.below) : "up to " + std::to_string(other.below_range.second);
  const bool one = other.below == 1;
  sentences.push_back("On the other side, between " + span + ", there " + (one ? "is " : "are ") + many +
                      (one ? " critical factor: it counts" : " critical factors: they count") +
                      " if the load can reverse, or if the sign of G is the other one (--load-sign minus).");
  outcome.warnings.push_back(
      {"factors-on-the-other-side",
       "critical factors lie between " + span + " (" + many + "); make sure of the sign convention of G",
       outcome.inputs.front().path});
}

std::optional<std::string> convexity_sentence(const std::vector<ShiftCount>& counts, bool constrained) {
  double low = 0, high = 0;
  for (const ShiftCount& count : counts) {
    if (count.level == Level::kNone || count.below != 0) continue;
    low = std::min(low, count.shift);
    high = std::max(high, count.shift);
  }
  if (low == high) return std::nullopt;
  return std::string(constrained ? "On its constraints " : "") +
         "K + f G is positive definite at every f in [" + number_text(low) + ", " + number_text(high) +
         "], because it is at the ends (convexity).";
}

}  // namespace stanchion
