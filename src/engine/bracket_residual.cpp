#include "engine/bracket_residual.hpp"

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <tuple>

#include "base/fault_words.hpp"
#include "engine/mode_search.hpp"

namespace stanchion {
namespace {

/// An end of the range lies in a gap of at least this relative width, so that the count there is easily
/// certified.
constexpr double kGap = 1e-5;
constexpr int kMostAttempts = 5;

class ResidualBrackets {
 public:
  ResidualBrackets(PencilCounter& counter, const Request& request, const RunContext& context,
                   const ResidualQuestion& question, ThreadPool& pool, Outcome& outcome)
      : counter_(counter),
        request_(request),
        context_(context),
        question_(question),
        pool_(pool),
        outcome_(outcome) {}

  Result<ResidualAnswer> run() {
    const auto count = [this](double shift) { return count_at(shift); };
    auto base = settle_base(counter_, request_, context_, count, pool_, outcome_);
    if (!base.ok()) return base.status();
    base_ = std::move(*base);
    if (!base_) return std::move(answer_);
    search_.emplace(counter_, *base_, request_, context_, pool_, outcome_);
    Result<bool> done = question_.first ? bracket_first() : bracket_range();
    if (!done.ok()) return done.status();
    if (!*done) answer_.found.reset();
    return std::move(answer_);
  }

 private:
  // ---- counts and groups
  // ----------------------------------------------------------------------------------------

  Result<std::optional<CountFact>> count_at(double shift) {
    if (const CountFact* known = answer_.counts.at(shift)) return std::optional<CountFact>(*known);
    if (counter_.kind() == CountKind::kAbove && shift == counter_.origin()) {
      return std::optional<CountFact>(counter_.fact_at_origin());
    }
    const auto warnings = outcome_.warnings.size();
    auto count = counter_.count(shift);
    if (!count.ok()) return count.status();
    outcome_.warnings.resize(warnings);
    auto fact = counter_.fact(*count);
    if (!fact) return fact;
    return remember(*fact);
  }

  /// 1 / theta - tau of the two ends, both roundings outwards.
  std::pair<double, double> values_of(const EigenvalueGroup& group) const {
    const double low = 1 / group.high, high = 1 / group.low;
    const auto outwards = [&](double value, double part, int direction) {
      return value +
             direction * 0x1p-51 * (std::fabs(value) + 2 * std::fabs(part) + 2 * std::fabs(base_->tau));
    };
    return {outwards(low - base_->tau, low, -1), outwards(high - base_->tau, high, 1)};
  }

  /// The number at `shift`, when so many as `expected` were shown on its side already: no more than that is
  /// then all that is left to show. Otherwise it is counted.
  Result<std::optional<CountFact>> count_expecting(double shift, Offset expected) {
    if (answer_.counts.at(shift)) return count_at(shift);
    auto most = counter_.at_most(shift, static_cast<Index>(expected));
    if (!most.ok()) return most.status();
    if (*most && **most < expected) return too_many();
    if (!*most || **most > expected) return count_at(shift);
    const Offset number = counter_.two_sided() && shift < 0 ? -expected : expected;
    CountFact fact{shift, number, number, std::nullopt, Level::kProved, 0};
    for (const Certificate* why : {&base_->base.certificate(), &counter_.base()}) {
      if (why->level != Level::kStatistical) continue;
      fact.level = Level::kStatistical;
      fact.failure_probability += why->failure_probability.value_or(0);
    }
    return remember(fact);
  }

  static Status too_many() {
    return Status::internal(
        std::string("more values lie in disjoint residual intervals than a certified count allows: ") +
        kMachineOrProgram);
  }

  Result<std::optional<CountFact>> remember(const CountFact& fact) {
    answer_.counts.add(fact);
    if (answer_.counts.contradictions().empty()) return std::optional(fact);
    return Status::internal(std::string("certified counts contradict each other: ") + kMachineOrProgram);
  }

  /// Groups of pairs by the side of zero they are on: their values come from different ends of the spectrum.
  struct Sides {
    std::vector<EigenvalueGroup> above, below;
    static Offset number(const std::vector<EigenvalueGroup>& groups) {
      Offset sum = 0;
      for (const EigenvalueGroup& group : groups) sum += static_cast<Offset>(group.pairs.size());
      return sum;
    }
  };

  /// Those whose values lie between `from` and `to` for certain.
  Sides groups_inside(const std::vector<ResidualPair>& pairs, double from, double to) const {
    Sides sides;
    for (EigenvalueGroup& group : disjoint_groups(base_->base, pairs)) {
      if (!(group.low * group.high > 0) || !std::isfinite(group.low) || !std::isfinite(group.high)) continue;
      const auto [low_end, high_end] = values_of(group);
      if (!(low_end > from) || !(high_end < to)) continue;
      (group.low > 0 ? sides.above : sides.below).push_back(std::move(group));
    }
    return sides;
  }

  FoundValues found_of(const std::vector<ResidualPair>& pairs, const EigenvalueGroup& group) const {
    FoundValues found;
    std::tie(found.low, found.high) = values_of(group);
    double sum = 0;
    for (const std::size_t p : group.pairs) sum += base_->shift_of(pairs[p].theta);
    found.value = std::clamp(sum / static_cast<double>(group.pairs.size()), found.low, found.high);
    found.count = static_cast<Index>(group.pairs.size());
    found.level = base_->base.certificate().level;
    found.failure_probability = base_->base.certificate().failure_probability.value_or(0);
    found.proof = "residual";
    if (request_.bracket.want_modes) {
      for (const std::size_t p : group.pairs) {
        found.modes.push_back(counter_.pencil().mode_of(pairs[p].vector, base_->shift_of(pairs[p].theta),
                                                        pairs[p].radius / std::fabs(pairs[p].theta)));
      }
    }
    return found;
  }

  /// Whether the groups inside (from, to) are all that the counts at the two ends say there is. Too many
  /// would contradict a certified count: a fault. When they are all, they are the answer.
  Result<bool> settle(const std::vector<ResidualPair>& pairs, const std::optional<CountFact>& low,
                      const CountFact& high, double from, double to) {
    const CountedRange range = counted_range(low, high, from, to);
    if (!range.count) return false;
    Sides sides = groups_inside(pairs, from, to);
    const Offset sum = Sides::number(sides.above) + Sides::number(sides.below);
    if (sum > *range.count) return too_many();
    if (sum < *range.count) return false;
    sharpen_all(pairs, from, to, sides);
    FoundRange found;
    for (const auto* groups : {&sides.above, &sides.below}) {
      for (const EigenvalueGroup& group : *groups) found.values.push_back(found_of(pairs, group));
    }
    std::sort(found.values.begin(), found.values.end(),
              [](const FoundValues& a, const FoundValues& b) { return a.low < b.low; });
    for (FoundValues& values : found.values) {
      if (range.level != Level::kStatistical) continue;
      values.level = Level::kStatistical;
      values.failure_probability += range.failure_probability.value_or(0);
    }
    found.complete = range;
    answer_.found = std::move(found);
    return true;
  }

  /// The groups are all that is between the two ends: each is alone between its neighbours, and the outermost
  /// have an end beside them, or nothing up to infinity. The ends of theta are rounded inwards.
  void sharpen_all(const std::vector<ResidualPair>& pairs, double from, double to, Sides& sides) const {
    const double pole = -base_->tau;
    const auto inwards = [&](double shift, int direction) {
      const double theta = base_->theta_of(shift);
      return theta + direction * 0x1p-50 * std::fabs(theta);
    };
    sharpen(base_->base, pairs, inwards(to, 1), from > pole ? inwards(from, -1) : INFINITY, sides.above);
    sharpen(base_->base, pairs, to < pole ? inwards(to, 1) : -INFINITY, inwards(from, -1), sides.below);
  }

  /// Below this no value is counted.
  double lowest() const { return counter_.kind() == CountKind::kBelow ? -INFINITY : counter_.origin(); }

  /// Steps until `look`, which leaves in `seen` what there is, says so; from a base near a crowd once seen.
  Result<bool> iterate(const std::function<bool()>& look, const Candidates& seen, Side side,
                       std::size_t wanted) {
    bool move = false;
    auto enough = search_->iterate([&] {
      if (look()) return true;
      move = !moved_ && counter_.two_sided() && side != Side::kBoth && search_->crowded(seen, wanted);
      return move;
    });
    if (!enough.ok() || !move) return enough;
    if (Status status = move_near(seen, side, wanted); !status.ok()) return status;
    return search_->iterate(look);
  }

  /// Goes on from a base half the width of the crowd before it; from the old one where none is to be had.
  Status move_near(const Candidates& found, Side side, std::size_t wanted) {
    moved_ = true;
    const double first = base_->shift_of(found.list.front().theta);
    const double width = base_->shift_of(found.list[wanted - 1].theta) - first;
    search_.reset();  // its vectors take more memory than the second factor
    auto near = base_at(counter_, first - width / 2, pool_, outcome_);
    if (!near.ok()) return near.status();
    if (*near) base_ = std::move(*near);
    search_.emplace(counter_, *base_, request_, context_, pool_, outcome_);
    const Index most = static_cast<Index>(wanted) + kBlockVectors;
    search_->start(static_cast<Index>(wanted), side == Side::kPositive ? KeptValues{most, kBlockVectors}
                                                                       : KeptValues{kBlockVectors, most});
    return {};
  }

  // ---- a range
  // --------------------------------------------------------------------------------------------------

  Result<bool> bracket_range() {
    const ValueRange range = countable(counter_, question_.range);
    std::optional<CountFact> low, high;
    if (counter_.two_sided()) {
      // K is definite: n(0) = 0, and 0 itself is never a value.
      const CountFact zero = counter_.fact_at_origin();
      for (auto [fact, end] : {std::pair{&low, *range.low}, std::pair{&high, *range.high}}) {
        if (end == 0) {
          *fact = zero;
          continue;
        }
        auto counted = count_at(end);
        if (!counted.ok()) return counted.status();
        *fact = *counted;
      }
      if (!low) return false;
    } else {
      if (range.low) {
        auto counted = count_at(*range.low);
        if (!counted.ok()) return counted.status();
        low = *counted;
        if (!low) return false;
      }
      auto counted = count_at(*range.high);
      if (!counted.ok()) return counted.status();
      high = *counted;
    }
    if (!high || !high->exact() || (low && !low->exact())) return false;
    const double from = range.low.value_or(lowest()), to = *range.high;
    const Offset between = high->least - (low ? low->least : 0);
    if (between == 0) return settle({}, low, *high, from, to);
    // From the outermost side of zero inwards everything comes before what is asked.
    const Offset positive = std::max<Offset>(0, high->least);
    const Offset negative = counter_.two_sided() ? std::max<Offset>(0, -low->least) : 0;
    if (positive + negative > counter_.pencil().analysis().tree.rows) return false;
    if (lies_inside(positive + negative, between, from, to)) {
      auto started = search_->start_inside(from, to, static_cast<Index>(between));
      if (!started.ok()) return started.status();
      if (*started) {
        Candidates nearest;
        auto done =
            search_range(low, *high, from, to, nearest, Side::kBoth, [&](std::vector<Candidate>& chosen) {
              nearest = search_->candidates(Side::kBoth);
              chosen = inside({&nearest}, from, to);
              return nearest.leading >= static_cast<std::size_t>(between);
            });
        if (!done.ok() || *done) return done;
      }
    }
    const auto wanted = static_cast<Index>(positive + negative);
    const Index keep = wanted + kBlockVectors;
    search_->start(wanted, {keep, counter_.kind() == CountKind::kBelow ? 0 : keep});
    Candidates up, down;
    const Side side = negative == 0 ? Side::kPositive : positive == 0 ? Side::kNegative : Side::kBoth;
    return search_range(low, *high, from, to, negative == 0 ? up : down, side,
                        [&](std::vector<Candidate>& chosen) {
                          up = search_->candidates(Side::kPositive);
                          down = search_->candidates(Side::kNegative);
                          chosen = inside({&up, &down}, from, to);
                          return up.leading >= static_cast<std::size_t>(positive) &&
                                 down.leading >= static_cast<std::size_t>(negative);
                        });
  }

  /// Whether the values asked lie so far inside that one more factorization, among them, pays.
  bool lies_inside(Offset from_outside, Offset between, double from, double to) const {
    const bool one_side = from + base_->tau > 0 || to + base_->tau < 0;
    return one_side && from_outside > 2 * between + 4 * kBlockVectors;
  }

  /// `look` looks at the space, leaves in `seen` what there is, chooses from it, and says whether the search
  /// may end. `side`: where all of them are; both: no crowd is looked for.
  Result<bool> search_range(const std::optional<CountFact>& low, const CountFact& high, double from,
                            double to, const Candidates& seen, Side side,
                            const std::function<bool(std::vector<Candidate>&)>& look) {
    for (int attempt = 0; attempt < kMostAttempts; ++attempt) {
      std::vector<Candidate> chosen;
      auto enough = iterate([&] { return look(chosen); }, seen, side, search_->wanted());
      if (!enough.ok()) return enough.status();
      auto pairs = search_->pairs_of(chosen, chosen.size());
      if (!pairs.ok()) return pairs.status();
      auto done = settle(*pairs, low, high, from, to);
      if (!done.ok() || *done) return done;
      search_->look_closer();
    }
    return false;
  }

  std::vector<Candidate> inside(std::initializer_list<const Candidates*> sides, double from,
                                double to) const {
    std::vector<Candidate> chosen;
    for (const Candidates* side : sides) {
      for (const Candidate& candidate : side->list) {
        const double shift = base_->shift_of(candidate.theta);
        if (candidate.close && shift > from && shift < to) chosen.push_back(candidate);
      }
    }
    return chosen;
  }

  // ---- the first ones
  // -------------------------------------------------------------------------------------------

  /// How many of `found` to take: `wanted`, and what is not told apart from the last of them; 0 as long as
  /// the next one is not known well enough.
  static std::size_t end_of_cluster(const Candidates& found, std::size_t wanted) {
    for (std::size_t many = wanted; many <= found.leading && many > 0; ++many) {
      if (many >= found.list.size()) return 0;
      const double last = std::fabs(found.list[many - 1].theta), next = std::fabs(found.list[many].theta);
      const double gap = last - next;
      if (gap > kGap * last && found.list[many].ritz.residual < 0.2 * gap) return many;
      if (gap > kGap * last) return 0;
    }
    return 0;
  }

  /// What a full space is reduced to.
  KeptValues keep(Index most) const {
    if (counter_.kind() == CountKind::kBelow) return {most, 0};
    if (!counter_.two_sided()) return {most, kBlockVectors};
    if (question_.side == Side::kBoth) return {most, most};
    return question_.side == Side::kPositive ? KeptValues{most, kBlockVectors}
                                             : KeptValues{kBlockVectors, most};
  }

  Result<bool> bracket_first() {
    const Side side = counter_.two_sided() ? question_.side : Side::kPositive;
    const auto wanted = static_cast<std::size_t>(*question_.first + base_->rigid);
    search_->start(static_cast<Index>(wanted), keep(static_cast<Index>(wanted) + kBlockVectors));
    std::size_t many = 0;
    for (int attempt = 0; attempt < kMostAttempts; ++attempt) {
      Candidates found;
      const auto look = [&] {
        found = search_->candidates(side);
        many = end_of_cluster(found, wanted);
        return many > 0;
      };
      auto enough = iterate(look, found, side, wanted);
      if (!enough.ok()) return enough.status();
      if (!*enough) many = found.leading;  // the space holds no more: perhaps there are fewer
      auto pairs = search_->pairs_of(found.list, many);
      if (!pairs.ok()) return pairs.status();
      auto done = settle_first(*pairs, found, many, side, wanted);
      if (!done.ok()) return done;
      if (*done) {
        // What is beyond those asked: a cluster taken in whole, or values that came up at the end.
        Offset sum = 0;
        for (const FoundValues& values : answer_.found->values) sum += values.count;
        answer_.more_than_asked = static_cast<Index>(std::max<Offset>(0, sum - static_cast<Offset>(wanted)));
        answer_.fewer_than_asked = static_cast<Index>(std::max<Offset>(0, static_cast<Offset>(wanted) - sum));
        return true;
      }
      search_->look_closer();
    }
    return false;
  }

  /// The end of the range in the gap behind the last of `many`, counted, and compared.
  Result<bool> settle_first(const std::vector<ResidualPair>& pairs, const Candidates& found, std::size_t many,
                            Side side, std::size_t wanted) {
    double theta = 0;
    if (many == 0 || many >= found.list.size() || many < wanted) {
      // Fewer than asked: look well beyond the last, or beyond the largest of the other side.
      const double largest = search_->largest();
      if (!(largest > 0)) return false;
      theta = many > 0 ? std::fabs(found.list[many - 1].theta) / 4 : largest / 16;
    } else {
      const double last = std::fabs(found.list[many - 1].theta), next = std::fabs(found.list[many].theta);
      theta = next + 0.5 * (last - next);
    }
    const double gap = 0.2 * gap_of(found, many, theta), sign = side == Side::kNegative ? -1 : 1;
    double end = round_between(std::fabs(base_->shift_of(sign * theta * (1 - gap))),
                               std::fabs(base_->shift_of(sign * theta * (1 + gap))));
    if (many < wanted) {
      auto reached = look_further(end, side, static_cast<Offset>(many));
      if (!reached.ok()) return reached.status();
      if (!*reached) return false;  // there are more, too far out for this space
    }
    std::optional<CountFact> low, high;
    const CountFact zero = counter_.fact_at_origin();
    const Sides shown = groups_inside(pairs, counter_.two_sided() ? -end : -base_->tau, end);
    if (side != Side::kNegative) {
      auto counted = count_expecting(end, Sides::number(shown.above));
      if (!counted.ok()) return counted.status();
      high = *counted;
    } else {
      high = zero;
    }
    if (counter_.two_sided()) low = zero;
    if (side != Side::kPositive) {
      auto counted = count_expecting(-end, Sides::number(shown.below));
      if (!counted.ok()) return counted.status();
      low = *counted;
    }
    if (!high || (!low && counter_.two_sided())) return false;
    // Without a lower end: nothing lies below -tau, for K + tau M is definite and M semidefinite.
    const double from = low ? low->shift : 0 - base_->tau;
    auto done = settle(pairs, low, *high, from, high->shift);
    if (done.ok() && *done && !low) rest_on_base(*answer_.found->complete);
    return done;
  }

  /// That nothing lies below -tau is known from the base alone.
  void rest_on_base(CountedRange& range) const {
    const Certificate& base = base_->base.certificate();
    if (base.level != Level::kStatistical) return;
    range.level = Level::kStatistical;
    range.failure_probability = range.failure_probability.value_or(0) + base.failure_probability.value_or(0);
  }

  /// Moves `end` outwards in a few long strides, as long as the counts there find no more than `many`; false
  /// when they do.
  Result<bool> look_further(double& end, Side side, Offset many) {
    constexpr int kStrides = 4;
    constexpr double kStride = 32;
    const double signs[2] = {1, -1};
    for (int k = 0; k < kStrides; ++k) {
      Offset inside = 0;
      for (const double sign : signs) {
        if (side != Side::kBoth && (sign > 0) != (side == Side::kPositive)) continue;
        auto fact = count_at(sign * end * kStride);
        if (!fact.ok()) return fact.status();
        if (!*fact || !(*fact)->exact()) return true;  // as far as counts can tell
        inside += std::abs((*fact)->least);
      }
      if (inside > many) return false;
      end *= kStride;
    }
    return true;
  }

  /// Half the free space around `theta`, relative to it.
  static double gap_of(const Candidates& found, std::size_t many, double theta) {
    if (many == 0 || many >= found.list.size()) return 0.5;
    const double next = std::fabs(found.list[many].theta);
    return std::clamp((theta - next) / theta, 0.0, 0.5);
  }

  /// A number between `a` and `b` with as few digits as possible.
  static double round_between(double a, double b) {
    const double low = std::min(a, b), high = std::max(a, b);
    const double middle = low + (high - low) / 2;
    for (int digits = 2; digits < 16; ++digits) {
      char text[40];
      std::snprintf(text, sizeof(text), "%.*g", digits, middle);
      const double rounded = std::strtod(text, nullptr);
      if (rounded > low && rounded < high) return rounded;
    }
    return middle;
  }

  PencilCounter& counter_;
  const Request& request_;
  const RunContext& context_;
  const ResidualQuestion& question_;
  ThreadPool& pool_;
  Outcome& outcome_;
  ResidualAnswer answer_;
  std::optional<SpectralBase> base_;
  std::optional<ModeSearch> search_;
  bool moved_ = false;  ///< a base near the values was made, or tried
};

}  // namespace

Result<ResidualAnswer> bracket_by_residuals(PencilCounter& counter, const Request& request,
                                            const RunContext& context, const ResidualQuestion& question,
                                            ThreadPool& pool, Outcome& outcome) {
  return ResidualBrackets(counter, request, context, question, pool, outcome).run();
}

}  // namespace stanchion
