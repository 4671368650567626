#include "engine/bracket_counts.hpp"
#include "base/fault_words.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace stanchion {
namespace {

constexpr int kMostCountsAValue = 120;
constexpr int kMostDoublings = 60, kSmallStrides = 30;
/// Over the ratio of the two norms, beyond which no value is looked for: rows without stiffness make the norm
/// of the scaled second matrix large, and the ratio small.
constexpr double kFarthest = 0x1p80;

class Bisection {
 public:
  Bisection(PencilCounter& counter, const Request& request, Staircase known, Outcome& outcome)
      : counter_(counter), request_(request), staircase_(std::move(known)), outcome_(outcome) {
    if (counter.kind() != CountKind::kBelow) staircase_.add(counter.fact_at_origin());
  }

  Result<FoundRange> run(const ValueRange& asked, std::optional<Index> first, bool negative) {
    const ValueRange range = first ? asked : countable(counter_, asked);
    auto numbers = first ? first_numbers(*first, negative) : numbers_in(range);
    if (!numbers.ok()) return numbers.status();
    FoundRange found;
    if (!*numbers) return found;
    auto [begin, end] = **numbers;
    for (Offset number = begin; number < end; ++number) {
      if (Status status = narrow(number); !status.ok()) return status;
    }
    if (end > begin) {
      if (Status status = take_in_clusters(begin, end); !status.ok()) return status;
    }
    collect(begin, end, found);
    const CountFact* at_zero = staircase_.at(0);
    found.none_at_zero = at_zero != nullptr && at_zero->exact();
    complete(range, begin, end, found);
    return found;
  }

 private:
  using Numbers =
      std::pair<Offset, Offset>;  ///< half open; value number k lies where n grows from k - 1 to k

  /// The fact at a shift, counted once; nothing when nothing is certified there.
  Result<std::optional<CountFact>> fact_at(double shift) {
    for (const CountFact& fact : staircase_.facts()) {
      if (fact.shift == shift) return std::optional<CountFact>(fact);
    }
    const auto warnings = outcome_.warnings.size();
    auto count = counter_.count(shift);
    if (!count.ok()) return count.status();
    outcome_.warnings.resize(warnings);  // shifts of ours: on a value or not concerns nobody
    auto fact = counter_.fact(*count);
    if (fact) staircase_.add(*fact);
    if (!staircase_.contradictions().empty()) {
      return Status::internal(std::string("certified counts contradict each other: ") + kMachineOrProgram);
    }
    return fact;
  }

  Result<std::optional<Numbers>> numbers_in(const ValueRange& range) {
    std::optional<Offset> below, above;
    if (range.low) {
      auto fact = fact_at(*range.low);
      if (!fact.ok()) return fact.status();
      if (*fact) below = (*fact)->most;
    } else {
      auto lowest = fact_below_everything(0);
      if (!lowest.ok()) return lowest.status();
      if (*lowest) below = 0;
    }
    auto fact = fact_at(*range.high);
    if (!fact.ok()) return fact.status();
    if (*fact) above = (*fact)->least;
    if (!below || !above) return std::optional<Numbers>{};
    return std::optional<Numbers>({*below + 1, std::max(*above, *below) + 1});
  }

  /// Shifts outwards until enough values lie inside.
  Result<std::optional<Numbers>> first_numbers(Index first, bool negative) {
    const double sign = negative ? -1 : 1;
    double shift = sign * counter_.pencil().size_ratio() * 0x1p-20 * std::numbers::inv_pi * 3;
    if (!(std::fabs(shift) > 0) || !std::isfinite(shift)) return std::optional<Numbers>{};
    Offset below = 0;
    if (!counter_.two_sided()) {
      auto lowest = fact_below_everything(-shift);
      if (!lowest.ok()) return lowest.status();
      if (!*lowest) return std::optional<Numbers>{};
      below = (*lowest)->most;
      auto at_zero = fact_at(0);
      if (!at_zero.ok()) return at_zero.status();
      if (*at_zero)
        first += static_cast<Index>((*at_zero)->most - (*at_zero)->least);  // rigid body modes are apart
    }
    Offset reached = 0;
    for (int k = 0; k < kMostDoublings; ++k, shift *= k < kSmallStrides ? 4 : 64) {
      auto fact = fact_at(shift);
      if (!fact.ok()) return fact.status();
      if (!*fact) continue;
      reached = negative ? -(*fact)->most : (*fact)->least;
      if (reached - below >= first) break;
      if (std::fabs(shift) > counter_.pencil().size_ratio() * kFarthest) break;
    }
    const Offset many = std::min<Offset>(first, reached - below);
    if (negative) return std::optional<Numbers>({1 - many, 1});
    return std::optional<Numbers>({below + 1, below + many + 1});
  }

  /// A fact with no value below it, from `shift` (0 or less) outwards.
  Result<std::optional<CountFact>> fact_below_everything(double shift) {
    if (counter_.kind() == CountKind::kAbove) return std::optional<CountFact>(counter_.fact_at_origin());
    for (int k = 0; k < kMostDoublings; ++k) {
      auto fact = fact_at(shift);
      if (!fact.ok()) return fact.status();
      if (*fact && (*fact)->most == 0) return fact;
      shift = shift < 0 ? 4 * shift : -counter_.pencil().size_ratio() * 0x1p-20;
    }
    return std::optional<CountFact>{};
  }

  /// Halves the interval of one value until it is narrow, or a count says no more.
  Status narrow(Offset number) {
    for (int k = 0; k < kMostCountsAValue; ++k) {
      const auto bracket = staircase_.bracket(number);
      if (!bracket) return {};
      const double size = std::max(std::fabs(bracket->low), std::fabs(bracket->high));
      const double width = bracket->high - bracket->low;
      if (width <= request_.bracket.width * size || width < 0x1p-60 * counter_.pencil().size_ratio())
        return {};
      const double middle = middle_of(*bracket);
      if (!(middle > bracket->low && middle < bracket->high)) return {};
      auto narrower = narrowed_at(middle, *bracket, number);
      if (!narrower.ok()) return narrower.status();
      if (!*narrower) return {};  // the band around the value itself is as narrow as counts can tell
    }
    return {};
  }

  /// Far apart ends of one sign: the geometric middle gains digits faster. Not the middle of round ends: it
  /// is round as well, as values of simple models are, and a count at a value may tell nothing.
  static double middle_of(const Staircase::Bracket& bracket) {
    const bool spread = bracket.low > 0 && bracket.high > 4 * bracket.low;
    const bool spread_negative = bracket.high < 0 && bracket.low < 4 * bracket.high;
    if (spread) return std::sqrt(bracket.low) * std::sqrt(bracket.high);
    if (spread_negative) return -std::sqrt(-bracket.low) * std::sqrt(-bracket.high);
    return bracket.low + (bracket.high - bracket.low) * 0.49;
  }

  /// Whether a count at `shift`, inside the interval `before` of a value, makes it end there, or a tenth
  /// narrower.
  Result<bool> narrowed_at(double shift, const Staircase::Bracket& before, Offset number) {
    auto fact = fact_at(shift);
    if (!fact.ok()) return fact.status();
    const auto after = staircase_.bracket(number);
    if (!after) return false;
    return after->low == shift || after->high == shift ||
           after->high - after->low < 0.9 * (before.high - before.low);
  }

  /// An interval holds all values that are not told apart from its own: those join, whether asked or not.
  Status take_in_clusters(Offset& begin, Offset& end) {
    for (;;) {
      const auto last = staircase_.bracket(end - 1), next = staircase_.bracket(end);
      if (!last || !next || !(next->low < last->high)) break;
      if (Status status = narrow(end); !status.ok()) return status;
      const auto narrower = staircase_.bracket(end);
      if (!narrower || !(narrower->low < staircase_.bracket(end - 1)->high)) break;
      ++end;
    }
    for (;;) {
      const auto first = staircase_.bracket(begin), before = staircase_.bracket(begin - 1);
      if (!first || !before || !(first->low < before->high)) break;
      if (Status status = narrow(begin - 1); !status.ok()) return status;
      const auto narrower = staircase_.bracket(begin - 1);
      if (!narrower || !(staircase_.bracket(begin)->low < narrower->high)) break;
      --begin;
    }
    return {};
  }

  /// One entry for values whose intervals meet.
  void collect(Offset begin, Offset end, FoundRange& found) const {
    for (Offset number = begin; number < end; ++number) {
      const auto bracket = staircase_.bracket(number);
      if (!bracket) continue;
      if (!found.values.empty() && bracket->low < found.values.back().high) {
        FoundValues& group = found.values.back();
        group.high = std::max(group.high, bracket->high);
        group.low = std::min(group.low, bracket->low);
        group.value = group.low + (group.high - group.low) / 2;
        ++group.count;
        take_backing(group, *bracket);
        continue;
      }
      FoundValues group;
      group.low = bracket->low;
      group.high = bracket->high;
      group.value = group.low + (group.high - group.low) / 2;
      group.level = Level::kProved;
      take_backing(group, *bracket);
      found.values.push_back(group);
    }
  }

  static void take_backing(FoundValues& group, const Staircase::Bracket& bracket) {
    if (bracket.level != Level::kStatistical) return;
    group.level = Level::kStatistical;
    group.failure_probability += bracket.failure_probability;
  }

  /// The range asked, or the one that its outermost counts span; complete where both are exact.
  void complete(const ValueRange& range, Offset begin, Offset end, FoundRange& found) const {
    std::optional<CountFact> low, high;
    for (const CountFact& fact : staircase_.facts()) {
      if (!fact.exact()) continue;
      if (range.high) {
        if (range.low && fact.shift == *range.low) low = fact;
        if (fact.shift == *range.high) high = fact;
      } else {
        // From 0 where that is known to be an end; else as wide as is known.
        const bool above_zero = !counter_.two_sided() || begin < 1 || fact.shift >= 0;
        const bool below_zero = !counter_.two_sided() || end > 1 || fact.shift <= 0;
        if (fact.least == begin - 1 && above_zero && !low) low = fact;
        if (fact.least == end - 1 && below_zero) high = fact;
      }
    }
    if (!high || (range.high && range.low && !low)) return;
    if (counter_.two_sided() && !low) return;  // values may lie below all that was counted
    const double nothing_below = counter_.kind() == CountKind::kAbove ? counter_.origin() : -INFINITY;
    const double from = low ? low->shift : nothing_below;
    found.complete = counted_range(low, *high, from, high->shift);
    if (!low && !range.low) found.complete->count = static_cast<Index>(high->least);
  }

  PencilCounter& counter_;
  const Request& request_;
  Staircase staircase_;
  Outcome& outcome_;
};

}  // namespace

Result<FoundRange> bracket_by_counts(PencilCounter& counter, const Request& request, const ValueRange& range,
                                     std::optional<Index> first, bool negative, Staircase known,
                                     Outcome& outcome) {
  return Bisection(counter, request, std::move(known), outcome).run(range, first, negative);
}

}  // namespace stanchion
