#include "engine/bracket_residual.hpp"

#include <algorithm>
#include <cmath>

#include "engine/mode_search.hpp"
#include "engine/range_ends.hpp"
#include "engine/residual_proof.hpp"
#include "model/shift_grid.hpp"

namespace stanchion {
namespace {

constexpr int kMostAttempts = 5;
/// A range that is sought instead of the first values may hold so many, and eight times as many as those.
constexpr Offset kMostAsRange = 64;
class ResidualBrackets {
 public:
  ResidualBrackets(PencilCounter& counter, const Request& request, const RunContext& context,
                   const ResidualQuestion& question, ThreadPool& pool, Outcome& outcome)
      : counter_(counter),
        request_(request),
        context_(context),
        question_(question),
        pool_(pool),
        outcome_(outcome),
        proof_(counter, request, outcome, answer_.counts),
        ends_(counter, proof_) {}

  Result<ResidualAnswer> run() {
    const auto count = [this](double shift) { return count_at(shift); };
    auto base = settle_base(counter_, request_, context_, count, pool_, outcome_);
    if (!base.ok()) return base.status();
    if (!*base) return std::move(answer_);
    if ((**base).at_zero) answer_.counts.add(*(**base).at_zero);
    start_ = 0 - (**base).tau;
    stand_on(std::move(**base));
    auto found = question_.first ? bracket_first() : bracket_range();
    if (!found.ok()) return found.status();
    answer_.found = std::move(*found);
    return std::move(answer_);
  }

 private:
  static std::optional<FoundRange> nothing() { return std::nullopt; }

  Result<std::optional<CountFact>> count_at(double shift) { return proof_.count_at(shift); }

  /// Below this no value is counted.
  double lowest() const { return counter_.kind() == CountKind::kBelow ? -INFINITY : counter_.origin(); }

  void stand_on(SpectralBase base) {
    base_ = std::move(base);
    proof_.stand_on(*base_);
    search_.emplace(counter_, *base_, request_, context_, pool_, outcome_);
  }

  // ---- a crowd
  // ---------------------------------------------------------------------------------------------------

  enum class Ended { kEnough, kExhausted, kCrowd };

  /// Steps until `look` says so, or, from the base that all began with, `crowd`, where a base near it is to
  /// be had.
  Result<Ended> iterate(const std::function<bool()>& look, const std::function<bool()>& crowd) {
    bool seen = false;
    auto enough = search_->iterate([&] {
      if (look()) return true;
      seen = !near_ && crowd() && search_->room_for_factor();
      return seen;
    });
    if (!enough.ok()) return enough.status();
    return seen ? Ended::kCrowd : *enough ? Ended::kEnough : Ended::kExhausted;
  }

  /// Estimates of where values begin and end, on one side of 0.
  struct Extent {
    double first = 0, last = 0;
    std::size_t number = 0;
  };

  /// Of the first `many` of `found`, those on `side`; where none is, the first that is.
  Extent extent_of(const Candidates& found, std::size_t many, Side side) const {
    Extent extent;
    for (std::size_t k = 0; k < found.list.size() && (k < many || extent.first == 0); ++k) {
      const double shift = base_->shift_of(found.list[k].theta);
      if (side != Side::kBoth && counter_.two_sided() && (shift > 0) != (side == Side::kPositive)) continue;
      if (extent.first == 0) extent.first = shift;
      extent.last = shift;
      if (k < many) ++extent.number;
    }
    return extent;
  }

  /// Takes a base half the width of the extent before it, or, where a value lies before that, twice; the one
  /// that all began with where neither is definite, or none can be kept.
  Status stand_near(const Extent& extent) {
    near_ = true;
    search_.reset();  // its vectors take more memory than the second factor
    for (const double part : {0.5, 2.0}) {
      const double shift = extent.first - part * (extent.last - extent.first);
      const bool beyond_start = extent.first < start_ ? shift < start_ : shift > start_;
      if (extent.first == start_ || !beyond_start || shift == extent.first) break;
      auto near = base_at(counter_, shift, pool_, outcome_);
      if (!near.ok()) return near.status();
      if (!*near) continue;
      stand_on(std::move(**near));
      return {};
    }
    return stand_at_start();
  }

  Status stand_at_start() {
    if (0 - base_->tau != start_) {
      auto again = base_at(counter_, start_, pool_, outcome_);
      if (!again.ok()) return again.status();
      if (*again) base_ = std::move(**again);  // else the values are seen from beyond 0
    }
    stand_on(std::move(*base_));
    return {};
  }

  void start(std::size_t wanted, Side side) {
    search_->start(static_cast<Index>(wanted), keep(static_cast<Index>(wanted) + kBlockVectors, side));
  }

  /// The first `wanted` of both sides, each from a base of its own: those of the side that has most of them,
  /// and whatever lies as near on the other one.
  Result<std::optional<FoundRange>> first_apart(const Candidates& seen, std::size_t wanted) {
    const Extent up = extent_of(seen, wanted, Side::kPositive);
    const Extent down = extent_of(seen, wanted, Side::kNegative);
    const bool mostly_up = up.number >= down.number;
    const Side most = mostly_up ? Side::kPositive : Side::kNegative;
    std::size_t part = std::max(up.number, down.number);
    for (;;) {
      if (Status status = stand_near(mostly_up ? up : down); !status.ok()) return status;
      start(part, most);
      auto near = first_on(most, part);
      if (!near.ok() || !*near) return near;
      const double reach = mostly_up ? (*near)->complete->to : (*near)->complete->from;
      auto other = all_between_zero_and(-reach, mostly_up ? down : up);
      if (!other.ok() || !*other) return other;
      FoundRange all = mostly_up ? joined(std::move(**other), std::move(**near))
                                 : joined(std::move(**near), std::move(**other));
      if (*all.complete->count >= static_cast<Index>(wanted) || part == wanted)
        return std::optional(nearest_of(std::move(all), static_cast<Index>(wanted)));
      part = wanted;
    }
  }

  Result<std::optional<FoundRange>> all_between_zero_and(double end, Extent extent) {
    auto fact = count_at(end);
    if (!fact.ok()) return fact.status();
    if (!*fact || !(*fact)->exact()) return nothing();
    const auto number = static_cast<std::size_t>(std::abs((*fact)->least));
    const CountFact zero = counter_.fact_at_origin();
    if (end > 0 && number == 0) return proof_.settle({}, zero, **fact, 0, end);
    if (number == 0) return proof_.settle({}, **fact, zero, end, 0);
    if (number > static_cast<std::size_t>(counter_.pencil().analysis().tree.rows)) return nothing();
    if (std::fabs(extent.first) > std::fabs(end)) extent.first = end;
    extent.last = end;
    if (Status status = stand_near(extent); !status.ok()) return status;
    const Side side = end > 0 ? Side::kPositive : Side::kNegative;
    start(number, side);
    return end > 0 ? search_outside(zero, **fact, 0, end) : search_outside(**fact, zero, end, 0);
  }

  // ---- a range
  // --------------------------------------------------------------------------------------------------

  Result<std::optional<FoundRange>> bracket_range() {
    const ValueRange range = countable(counter_, question_.range);
    std::optional<CountFact> low, high;
    if (range.low) {
      auto counted = ends_.at(*range.low, -1, question_.past_values);
      if (!counted.ok()) return counted.status();
      low = *counted;
      if (!low) return nothing();
    }
    auto counted = ends_.at(*range.high, 1, question_.past_values);
    if (!counted.ok()) return counted.status();
    high = *counted;
    if (!high) return nothing();
    auto found = bracket_counted(low, *high);
    if (!found.ok() || !*found) return found;
    return std::optional(
        cut_to(std::move(**found), range.low.value_or(lowest()), *range.high, answer_.on_ends));
  }

  /// All values between two exact counts. Where the interval of a value holds one of the two ends, and cannot
  /// tell on which side the value lies, the search goes on to behind it, and the counts tell.
  Result<std::optional<FoundRange>> bracket_counted(const std::optional<CountFact>& low,
                                                    const CountFact& high) {
    std::optional<CountFact> outer_low = low, outer_high = high;
    double part = 1;
    for (int tries = 0; tries < kMostAttempts; ++tries, part *= 32) {
      held_low_ = held_high_ = false;
      auto found =
          bracket_between(outer_low, *outer_high, outer_low ? outer_low->shift : lowest(), outer_high->shift);
      if (!found.ok()) return found;
      if (*found) return cut_back(std::move(**found), outer_low, *outer_high, low, high);
      if (!held_low_ && !held_high_) break;
      for (const bool upper : {false, true}) {
        if (!(upper ? held_high_ : held_low_)) continue;
        std::optional<CountFact>& outer = upper ? outer_high : outer_low;
        auto behind = ends_.behind(outer->shift, part * std::fabs(outer->shift), upper ? 1 : -1);
        if (!behind.ok()) return behind.status();
        if (!*behind) return nothing();
        outer = *behind;
      }
    }
    return nothing();
  }

  Result<std::optional<FoundRange>> cut_back(FoundRange found, const std::optional<CountFact>& outer_low,
                                             const CountFact& outer_high, const std::optional<CountFact>& low,
                                             const CountFact& high) const {
    if (found.complete->from == (low ? low->shift : lowest()) && found.complete->to == high.shift)
      return std::optional(std::move(found));
    auto cut = cut_by_counts(std::move(found), outer_low, outer_high, low, high);
    if (!cut.ok()) return cut.status();
    return std::optional(std::move(*cut));
  }

  /// All values between two exact counts.
  Result<std::optional<FoundRange>> bracket_between(const std::optional<CountFact>& low,
                                                    const CountFact& high, double from, double to) {
    const Offset between = high.least - (low ? low->least : 0);
    if (between == 0) return proof_.settle({}, low, high, from, to);
    // From the outermost side of zero inwards everything comes before what is asked.
    const Offset outside = std::max<Offset>(0, high.least) +
                           (counter_.two_sided() ? std::max<Offset>(0, -low->least) : Offset{0});
    if (outside > counter_.pencil().analysis().tree.rows) return nothing();
    if (lies_inside(outside, between, from, to)) {
      auto started = search_->start_inside(from, to, static_cast<Index>(between));
      if (!started.ok()) return started.status();
      if (*started) {
        auto found = search_inside(low, high, from, to, static_cast<std::size_t>(between));
        if (!found.ok() || *found) return found;
      }
    }
    const Index most = static_cast<Index>(outside) + kBlockVectors;
    search_->start(static_cast<Index>(outside), {most, counter_.kind() == CountKind::kBelow ? 0 : most});
    return search_outside(low, high, from, to);
  }

  /// Whether the values asked lie so far inside that one more factorization, among them, pays.
  bool lies_inside(Offset from_outside, Offset between, double from, double to) const {
    const bool one_side = from + base_->tau > 0 || to + base_->tau < 0;
    return one_side && from_outside > 2 * between + 4 * kBlockVectors;
  }

  /// Around the shift that the space is of.
  Result<std::optional<FoundRange>> search_inside(const std::optional<CountFact>& low, const CountFact& high,
                                                  double from, double to, std::size_t between) {
    for (int attempt = 0; attempt < kMostAttempts; ++attempt) {
      std::vector<Candidate> chosen;
      auto enough = search_->iterate([&] {
        const Candidates nearest = search_->candidates(Side::kBoth);
        chosen = inside({&nearest}, from, to);
        return nearest.leading >= between;
      });
      if (!enough.ok()) return enough.status();
      auto found = settle(chosen, low, high, from, to);
      if (!found.ok() || *found || held_low_ || held_high_) return found;
      if (!search_->look_closer()) break;
    }
    return nothing();
  }

  /// From the outermost thetas inwards, as many as the counts at the ends say.
  Result<std::optional<FoundRange>> search_outside(const std::optional<CountFact>& low, const CountFact& high,
                                                   double from, double to) {
    const auto positive = static_cast<std::size_t>(std::max<Offset>(0, high.least));
    const auto negative =
        static_cast<std::size_t>(counter_.two_sided() ? std::max<Offset>(0, -low->least) : Offset{0});
    Candidates up, down;
    std::vector<Candidate> chosen;
    const auto look = [&] {
      up = search_->candidates(Side::kPositive);
      down = search_->candidates(Side::kNegative);
      chosen = inside({&up, &down}, from, to);
      return up.leading >= positive && down.leading >= negative;
    };
    const auto crowd = [&] { return search_->crowded(up, positive) || search_->crowded(down, negative); };
    for (int attempt = 0; attempt < kMostAttempts; ++attempt) {
      auto ended = iterate(look, crowd);
      if (ended.ok() && *ended == Ended::kCrowd) {
        const Extent above = extent_of(up, positive, Side::kPositive);
        const Extent below = extent_of(down, negative, Side::kNegative);
        if (positive > 0 && negative > 0) return range_apart(from, below, to, above);
        if (Status status = stand_near(negative > 0 ? below : above); !status.ok()) return status;
        start(positive + negative, negative > 0 ? Side::kNegative : Side::kPositive);
        ended = iterate(look, crowd);
      }
      if (!ended.ok()) return ended.status();
      auto found = settle(chosen, low, high, from, to);
      if (!found.ok() || *found || held_low_ || held_high_) return found;
      if (!search_->look_closer()) break;
    }
    return nothing();
  }

  Result<std::optional<FoundRange>> range_apart(double from, const Extent& below, double to,
                                                const Extent& above) {
    auto found_above = all_between_zero_and(to, above);
    if (!found_above.ok() || !*found_above) return found_above;
    auto found_below = all_between_zero_and(from, below);
    if (!found_below.ok() || !*found_below) return found_below;
    return std::optional(joined(std::move(**found_below), std::move(**found_above)));
  }

  /// Rigorous pairs of those chosen, compared with the counts at the ends.
  Result<std::optional<FoundRange>> settle(const std::vector<Candidate>& chosen,
                                           const std::optional<CountFact>& low, const CountFact& high,
                                           double from, double to) {
    auto pairs = search_->pairs_of(chosen, chosen.size());
    if (!pairs.ok()) return pairs.status();
    auto found = proof_.settle(*pairs, low, high, from, to);
    if (!found.ok() || *found) return found;
    const auto held = [&](double end) {
      return end != 0 && end != counter_.origin() && proof_.held_by_one(*pairs, end);
    };
    held_low_ = low && held(from);
    held_high_ = held(to);
    return found;
  }

  std::vector<Candidate> inside(std::initializer_list<const Candidates*> sides, double from,
                                double to) const {
    std::vector<Candidate> chosen;
    for (const Candidates* side : sides) {
      for (const Candidate& candidate : side->list) {
        const double shift = base_->shift_of(candidate.theta);
        const bool near =
            shift > from - kNearestEnd * std::fabs(from) && shift < to + kNearestEnd * std::fabs(to);
        if (candidate.close && near) chosen.push_back(candidate);
      }
    }
    return chosen;
  }

  // ---- the first ones
  // -------------------------------------------------------------------------------------------

  /// What a full space is reduced to.
  KeptValues keep(Index most, Side side) const {
    if (counter_.kind() == CountKind::kBelow) return {most, 0};
    if (!counter_.two_sided()) return {most, kBlockVectors};
    if (side == Side::kBoth) return {most, most};
    return side == Side::kPositive ? KeptValues{most, kBlockVectors} : KeptValues{kBlockVectors, most};
  }

  Result<std::optional<FoundRange>> bracket_first() {
    const Side side = counter_.two_sided() ? question_.side : Side::kPositive;
    const auto wanted = static_cast<std::size_t>(*question_.first + base_->rigid);
    start(wanted, side);
    auto found = first_on(side, wanted);
    if (!found.ok() || !*found) return found;
    // What is beyond those asked: a cluster taken in whole, or values that came up at the end.
    const auto asked = static_cast<Index>(wanted), sum = (*found)->complete->count.value_or(0);
    answer_.more_than_asked = std::max<Index>(0, sum - asked);
    answer_.fewer_than_asked = std::max<Index>(0, asked - sum);
    return found;
  }

  Result<std::optional<FoundRange>> first_on(Side side, std::size_t wanted) {
    for (int attempt = 0; attempt < kMostAttempts; ++attempt) {
      Candidates found;
      std::size_t many = 0;
      const auto look = [&] {
        found = search_->candidates(side);
        many = end_of_cluster(found, wanted);
        return many > 0;
      };
      const auto crowd = [&] { return search_->crowded(found, wanted); };
      auto ended = iterate(look, crowd);
      if (ended.ok() && *ended == Ended::kCrowd) {
        if (side == Side::kBoth) return first_apart(found, wanted);
        if (Status status = stand_near(extent_of(found, wanted, side)); !status.ok()) return status;
        start(wanted, side);
        ended = iterate(look, crowd);
      }
      if (!ended.ok()) return ended.status();
      if (*ended == Ended::kExhausted) many = found.leading;  // no room for more: perhaps there are fewer
      auto pairs = search_->pairs_of(found.list, many);
      if (!pairs.ok()) return pairs.status();
      auto settled = settle_first(*pairs, found, many, side, wanted);
      if (!settled.ok()) return settled;
      // An estimate that rounding moved out of its place makes an end too far in: there are more behind it.
      const auto number = static_cast<Offset>(std::min(many, wanted));
      if (*settled && *(*settled)->complete->count >= number) return settled;
      if (!search_->look_closer()) break;
    }
    return first_as_range(wanted);
  }

  /// Where the end behind the first values was counted, but not all before it were found, or an interval
  /// holds it: the range that ends there.
  Result<std::optional<FoundRange>> first_as_range(std::size_t wanted) {
    if (!counted_) return nothing();
    const auto [low, high] = *counted_;
    const Offset number = high.least - (low ? low->least : 0);
    const auto asked = static_cast<Offset>(wanted);
    if (number < asked || number > kMostAsRange + 8 * asked) return nothing();
    auto found = bracket_counted(low, high);
    if (found.ok() && *found && !low) rest_on_base(*(*found)->complete);
    return found;
  }

  /// The end of the range in the gap behind the last of `many`, counted, and compared.
  Result<std::optional<FoundRange>> settle_first(const std::vector<ResidualPair>& pairs,
                                                 const Candidates& found, std::size_t many, Side side,
                                                 std::size_t wanted) {
    double theta = 0;
    if (many == 0 || many >= found.list.size() || many < wanted) {
      // Fewer than asked: look well beyond the last, or beyond the largest of the other side.
      const double largest = search_->largest();
      if (!(largest > 0)) return nothing();
      theta = many > 0 ? std::fabs(found.list[many - 1].theta) / 4 : largest / 16;
    } else {
      const double last = std::fabs(found.list[many - 1].theta), next = std::fabs(found.list[many].theta);
      theta = next + 0.5 * (last - next);
    }
    const double gap = 0.2 * gap_of(found, many, theta), sign = side == Side::kNegative ? -1 : 1;
    double end = shortest_between(sign * base_->shift_of(sign * theta * (1 - gap)),
                                  sign * base_->shift_of(sign * theta * (1 + gap)));
    if (many < wanted) {
      auto reached = ends_.look_further(end, side, static_cast<Offset>(many));
      if (!reached.ok()) return reached.status();
      if (!*reached) return nothing();  // there are more, too far out for this space
    }
    std::optional<CountFact> low, high;
    const CountFact zero = counter_.fact_at_origin();
    const GroupSides shown = proof_.groups_inside(pairs, counter_.two_sided() ? -end : start_, end);
    const double next = many < found.list.size() ? std::fabs(found.list[many].theta) : 0;
    if (side != Side::kNegative) {
      auto counted = proof_.count_expecting(end, GroupSides::number(shown.above), pairs, next);
      if (!counted.ok()) return counted.status();
      high = *counted;
    } else {
      high = zero;
    }
    if (counter_.two_sided()) low = zero;
    if (side != Side::kPositive) {
      auto counted = proof_.count_expecting(-end, GroupSides::number(shown.below), pairs, -next);
      if (!counted.ok()) return counted.status();
      low = *counted;
    }
    if (!high || (!low && counter_.two_sided())) return nothing();
    // Without a lower end: nothing lies below the base, which is definite, for M is semidefinite or what lies
    // lower is not counted; nor between it and the one that all began with, as definite.
    const double from = low ? low->shift : start_;
    auto done = proof_.settle(pairs, low, *high, from, high->shift);
    if (done.ok() && *done && !low) rest_on_base(*(*done)->complete);
    if (done.ok() && !*done && high->exact() && (!low || low->exact())) counted_ = {low, *high};
    return done;
  }

  /// That nothing lies below the base is known from the base alone.
  void rest_on_base(CountedRange& range) const {
    const Certificate& base = base_->base.certificate();
    if (base.level != Level::kStatistical) return;
    range.level = Level::kStatistical;
    range.failure_probability = range.failure_probability.value_or(0) + base.failure_probability.value_or(0);
  }

  PencilCounter& counter_;
  const Request& request_;
  const RunContext& context_;
  const ResidualQuestion& question_;
  ThreadPool& pool_;
  Outcome& outcome_;
  ResidualAnswer answer_;
  ResidualProof proof_;
  RangeEnds ends_;
  std::optional<SpectralBase> base_;
  std::optional<ModeSearch> search_;
  double start_ = 0;  ///< the shift of the base that all began with
  /// An end of the range last sought lies in the interval of a value.
  bool held_low_ = false, held_high_ = false;
  /// Ends behind the first values, counted, when what lies between them was not found.
  std::optional<std::pair<std::optional<CountFact>, CountFact>> counted_;
  bool near_ = false;  ///< a base near the values was made, or tried
};

}  // namespace

Result<ResidualAnswer> bracket_by_residuals(PencilCounter& counter, const Request& request,
                                            const RunContext& context, const ResidualQuestion& question,
                                            ThreadPool& pool, Outcome& outcome) {
  return ResidualBrackets(counter, request, context, question, pool, outcome).run();
}

}  // namespace stanchion
