#include "engine/bracket_residual.hpp"

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <cstdlib>

#include "base/counter_random.hpp"
#include "base/fault_words.hpp"
#include "engine/host.hpp"
#include "spectrum/block_lanczos.hpp"
#include "spectrum/block_rows.hpp"

namespace stanchion {
namespace {

/// Below this many operations one more factorization costs less than anyone notices, and a proof says more
/// than a test.
constexpr double kProofIsCheap = 2e9;
/// An end of the range lies in a gap of at least this relative width, so that the count there is easily
/// certified.
constexpr double kGap = 1e-5;
/// Values this far below the largest are rounding, not values.
constexpr double kNoise = 1e-13;
constexpr int kMostAttempts = 4;

struct Candidate {
  RitzValue ritz;
  bool close = false;  ///< by the estimate of its residual
};

/// What the space holds of one side, or of both, by size.
struct Candidates {
  std::vector<Candidate> list;
  std::size_t leading = 0;  ///< so many from the start are close
};

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
    if (Status status = settle_base(); !status.ok()) return status;
    if (!base_) return std::move(answer_);
    second_ = counter_.pencil().second(-counter_.factor_of(1));
    Result<bool> done = question_.first ? bracket_first() : bracket_range();
    if (!done.ok()) return done.status();
    if (!*done) answer_.found.reset();
    return std::move(answer_);
  }

 private:
  // ---- the definite matrix whose factor is kept
  // -----------------------------------------------------------------

  bool small() const { return counter_.pencil().analysis().forecast.factor_flops < kProofIsCheap; }

  Status settle_base() {
    const bool factors = request_.pencil == Pencil::kGeometric;
    if ((!factors || small()) && counter_.kind() == CountKind::kDirections) {
      if (Status status = counter_.judge(); !status.ok()) return status;
      if (counter_.kind() == CountKind::kDirections) return {};
    }
    if (counter_.kind() == CountKind::kBelow) return settle_shifted_base();
    auto base = counter_.pencil().definite_base(0, counter_.stiffness_bound(), pool_, outcome_);
    if (!base.ok()) return base.status();
    base_ = std::move(*base);
    if (counter_.two_sided()) return {};
    if (base_) {
      counter_.accept_definite(base_->certificate());
      return {};
    }
    return counter_.judge();
  }

  /// K + tau M: tau = 0 where K is definite, else large enough, and of the size of the lowest values that are
  /// not zero.
  Status settle_shifted_base() {
    auto plain = try_base(0);
    if (!plain.ok()) return plain.status();
    if (*plain) return {};
    auto zero = count_at(0);
    if (!zero.ok()) return zero.status();
    if (*zero) rigid_ = static_cast<Index>((*zero)->most - (*zero)->least);
    const Offset below = *zero ? (*zero)->least : 0;
    double tau = counter_.pencil().size_ratio() * 1e-7;
    if (!(tau > 0) || !std::isfinite(tau)) return {};
    for (int k = 0; k < 8 && !base_; ++k, tau *= 64) {
      auto shifted = try_base(tau);
      if (!shifted.ok()) return shifted.status();
    }
    if (!base_) return {};
    return move_near_elastic(static_cast<std::size_t>(below + rigid_));
  }

  Status move_near_elastic(std::size_t before) {
    second_ = counter_.pencil().second(-counter_.factor_of(1));
    const BlockRows rows(second_);
    BlockLanczos lanczos = make_lanczos(rows, static_cast<Index>(before) + 4);
    for (int k = 0; k < 5 && lanczos.step({static_cast<Index>(before) + 8, 0}); ++k) {
      if (interrupted()) return Status::interrupted();
    }
    const Candidates found = candidates(lanczos, Side::kPositive);
    if (found.list.size() <= before) return {};
    const double elastic = shift_of(found.list[before].ritz.value);
    if (!(elastic > 0) || (tau_ < 30 * elastic && tau_ > elastic / 1000)) return {};
    std::optional<DefiniteBase> old = std::move(base_);
    const double old_tau = tau_;
    base_.reset();
    auto moved = try_base(elastic);
    if (!moved.ok()) return moved.status();
    if (!*moved) {
      base_ = std::move(old);
      tau_ = old_tau;
    }
    return {};
  }

  Result<bool> try_base(double tau) {
    double bound = 0;
    if (small()) {
      auto found = counter_.inertia_at(-tau, true);
      if (!found.ok()) return found.status();
      bound = found->certificate.smallest_eigenvalue_above.value_or(0);
      if (!(bound > 0)) return false;
    }
    auto base = counter_.pencil().definite_base(counter_.factor_of(-tau), bound, pool_, outcome_);
    if (!base.ok()) return base.status();
    if (!*base) return false;
    base_ = std::move(*base);
    tau_ = tau;
    return true;
  }

  // ---- between values and thetas
  // --------------------------------------------------------------------------------

  double shift_of(double theta) const { return 1 / theta - tau_; }
  double theta_of(double shift) const { return 1 / (shift + tau_); }

  // ---- approximations
  // -------------------------------------------------------------------------------------------

  bool interrupted() const { return context_.cancel != nullptr && context_.cancel->cancelled(); }

  BlockLanczos make_lanczos(const BlockRows& rows, Index wanted) {
    constexpr Index kV = kBlockVectors;
    const Index order = rows.rows();
    const Offset room = counter_.pencil().free_bytes() / 2 / (Offset{order} * Offset{sizeof(double)} + 1);
    Offset most = std::max<Offset>(16 * kV, (5 * Offset{wanted} / 2 + 8 * kV + kV - 1) / kV * kV);
    most =
        std::min({most, std::max<Offset>(room / kV * kV, 6 * kV), std::max<Offset>(order / kV * kV, 6 * kV)});
    const auto apply = [this, &rows](double* block) {
      base_->transposed_solve(block);
      work_.resize(static_cast<std::size_t>(rows.rows()) * static_cast<std::size_t>(kV));
      rows.times(block, work_.data(), pool_);
      std::copy(work_.begin(), work_.end(), block);
      base_->solve(block);
    };
    // The basis, vectors and work blocks, and the factor that a count at an end may keep beside the base's.
    const Offset doubles = Offset{order} * (most + 2 * wanted + 8 * kV);
    outcome_.memory.forecast =
        std::max(outcome_.memory.forecast, resident_bytes() + doubles * Offset{sizeof(double)} +
                                               counter_.pencil().analysis().forecast.peak_bytes_solve);
    return {apply, order, static_cast<Index>(most), CounterRandom::combine(counter_.pencil().seed(), 0x5c31),
            pool_};
  }

  double closeness() const { return 0.1 * request_.bracket.width; }

  Candidates candidates(BlockLanczos& lanczos, Side side) const {
    Candidates found;
    const std::vector<RitzValue>& all = lanczos.ritz_values();
    if (all.empty()) return found;
    const double noise = kNoise * std::fabs(all.front().value);
    for (const RitzValue& ritz : all) {
      const bool wanted = side == Side::kBoth || (side == Side::kPositive) == (ritz.value > 0);
      if (!wanted || !(std::fabs(ritz.value) > noise)) continue;
      found.list.push_back({ritz, ritz.residual <= closeness() * std::fabs(ritz.value)});
    }
    while (found.leading < found.list.size() && found.list[found.leading].close) ++found.leading;
    return found;
  }

  /// What a full basis is reduced to.
  KeptValues keep(Index wanted) const {
    const Index most = wanted + kBlockVectors;
    if (!counter_.two_sided()) return {most, 0};
    if (!question_.first || question_.side == Side::kBoth) return {most, most};
    return question_.side == Side::kPositive ? KeptValues{most, kBlockVectors}
                                             : KeptValues{kBlockVectors, most};
  }

  /// Steps until `enough` says so; false when the space is exhausted or the steps are used up first.
  template <class Enough>
  Result<bool> iterate(BlockLanczos& lanczos, Index wanted, const Enough& enough) {
    const Index most_steps = lanczos.steps() + 40 + wanted;
    Index next_look = lanczos.steps() + std::max<Index>(3, wanted / kBlockVectors);
    for (;;) {
      if (interrupted()) return Status::interrupted();
      const bool more = lanczos.steps() < most_steps && lanczos.step(keep(wanted));
      if (context_.progress)
        context_.progress("modes", std::min(1.0, lanczos.steps() / (6.0 + wanted / 3.0)));
      if (more && lanczos.steps() < next_look) continue;
      if (enough()) return true;
      if (!more) return false;
      next_look = lanczos.steps() + std::max<Index>(2, lanczos.columns() / 100);  // a look costs columns^3
    }
  }

  /// Rigorous pairs for the first `many` of `list`, refined where they are not close enough.
  Result<std::vector<ResidualPair>> pairs_of(const BlockLanczos& lanczos, const std::vector<Candidate>& list,
                                             std::size_t many) {
    std::vector<ResidualPair> pairs;
    constexpr auto kV = static_cast<std::size_t>(kBlockVectors);
    for (std::size_t first = 0; first < many; first += kV) {
      if (interrupted()) return Status::interrupted();
      std::vector<RitzValue> chosen;
      for (std::size_t k = first; k < std::min(first + kV, many); ++k) chosen.push_back(list[k].ritz);
      append(pairs,
             residual_pairs(*base_, second_, lanczos.vectors(chosen), static_cast<Index>(chosen.size())));
    }
    if (!pairs.empty() && worst(pairs) > request_.bracket.width / 3) refine(pairs);
    return pairs;
  }

  static void append(std::vector<ResidualPair>& all, std::vector<ResidualPair> more) {
    for (ResidualPair& pair : more) all.push_back(std::move(pair));
  }

  static double worst(const std::vector<ResidualPair>& pairs) {
    double most = 0;
    for (const ResidualPair& pair : pairs) most = std::max(most, pair.radius / std::fabs(pair.theta));
    return most;
  }

  void refine(std::vector<ResidualPair>& pairs) {
    constexpr auto kV = static_cast<std::size_t>(kBlockVectors);
    for (const ResidualPair& pair : pairs) {
      if (!(std::fabs(pair.theta) > 0) || !std::isfinite(pair.radius)) return;
    }
    const auto better = refined_coordinates(*base_, second_, pairs);
    std::vector<ResidualPair> fresh;
    const std::size_t rows = better.empty() ? 0 : better.front().size();
    for (std::size_t first = 0; first < better.size(); first += kV) {
      const std::size_t count = std::min(kV, better.size() - first);
      std::vector<double> block(rows * kV, 0.0);
      for (std::size_t v = 0; v < count; ++v) {
        for (std::size_t i = 0; i < rows; ++i) block[i * kV + v] = better[first + v][i];
      }
      append(fresh, residual_pairs(*base_, second_, block, static_cast<Index>(count)));
    }
    if (worst(fresh) < worst(pairs)) pairs = std::move(fresh);
  }

  // ---- counts and groups
  // ----------------------------------------------------------------------------------------

  Result<std::optional<CountFact>> count_at(double shift) {
    for (const CountFact& fact : answer_.counts.facts()) {
      if (fact.shift == shift) return std::optional<CountFact>(fact);
    }
    const auto warnings = outcome_.warnings.size();
    auto count = counter_.count(shift);
    if (!count.ok()) return count.status();
    outcome_.warnings.resize(warnings);
    auto fact = counter_.fact(*count);
    if (fact) answer_.counts.add(*fact);
    if (!answer_.counts.contradictions().empty()) {
      return Status::internal(std::string("certified counts contradict each other: ") + kMachineOrProgram);
    }
    return fact;
  }

  FoundValues found_of(const std::vector<ResidualPair>& pairs, const EigenvalueGroup& group) const {
    FoundValues found;
    // 1 / theta - tau, both roundings outwards.
    const double low = 1 / group.high, high = 1 / group.low;
    const auto outwards = [&](double value, double part, int direction) {
      return value + direction * 0x1p-51 * (std::fabs(value) + 2 * std::fabs(part) + 2 * tau_);
    };
    found.low = outwards(low - tau_, low, -1);
    found.high = outwards(high - tau_, high, 1);
    double sum = 0;
    for (const std::size_t p : group.pairs) sum += shift_of(pairs[p].theta);
    found.value = std::clamp(sum / static_cast<double>(group.pairs.size()), found.low, found.high);
    found.count = static_cast<Index>(group.pairs.size());
    found.level = base_->certificate().level;
    found.failure_probability = base_->certificate().failure_probability.value_or(0);
    found.proof = "residual";
    if (request_.bracket.want_modes) {
      for (const std::size_t p : group.pairs) {
        found.modes.push_back(counter_.pencil().mode_of(pairs[p].vector, shift_of(pairs[p].theta),
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
    FoundRange found;
    Offset sum = 0;
    for (const EigenvalueGroup& group : disjoint_groups(*base_, pairs)) {
      if (!(group.low * group.high > 0) || !std::isfinite(group.low) || !std::isfinite(group.high)) continue;
      FoundValues values = found_of(pairs, group);
      if (!(values.low > from) || !(values.high < to)) continue;
      sum += values.count;
      found.values.push_back(std::move(values));
    }
    if (sum > *range.count) {
      return Status::internal(
          std::string("more values lie in disjoint residual intervals than a certified count allows: ") +
          kMachineOrProgram);
    }
    if (sum < *range.count) return false;
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

  // ---- a range
  // --------------------------------------------------------------------------------------------------

  Result<bool> bracket_range() {
    const ValueRange& range = question_.range;
    std::optional<CountFact> low, high;
    if (counter_.two_sided()) {
      // K is definite: n(0) = 0, and 0 itself is never a value.
      const CountFact zero{
          0, 0, 0, std::nullopt, counter_.base().level, counter_.base().failure_probability.value_or(0)};
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
    const double from = range.low.value_or(-INFINITY), to = *range.high;
    const Offset between = high->least - (low ? low->least : 0);
    if (between == 0) return settle({}, low, *high, from, to);
    // From the outermost side of zero inwards everything comes before what is asked.
    const Offset positive = std::max<Offset>(0, high->least);
    const Offset negative = counter_.two_sided() ? std::max<Offset>(0, -low->least) : 0;
    if (positive + negative > counter_.pencil().analysis().tree.rows) return false;
    const BlockRows rows(second_);
    const auto wanted = static_cast<Index>(positive + negative);
    BlockLanczos lanczos = make_lanczos(rows, wanted);
    for (int attempt = 0; attempt < kMostAttempts; ++attempt) {
      std::vector<Candidate> chosen;
      auto enough = iterate(lanczos, wanted, [&] {
        const Candidates up = candidates(lanczos, Side::kPositive),
                         down = candidates(lanczos, Side::kNegative);
        chosen = inside(up, down, from, to);
        return up.leading >= static_cast<std::size_t>(positive) &&
               down.leading >= static_cast<std::size_t>(negative);
      });
      if (!enough.ok()) return enough.status();
      auto pairs = pairs_of(lanczos, chosen, chosen.size());
      if (!pairs.ok()) return pairs.status();
      auto done = settle(*pairs, low, *high, from, to);
      if (!done.ok() || *done) return done;
      lanczos.inject();
    }
    return false;
  }

  std::vector<Candidate> inside(const Candidates& up, const Candidates& down, double from, double to) const {
    std::vector<Candidate> chosen;
    for (const Candidates* side : {&up, &down}) {
      for (const Candidate& candidate : side->list) {
        const double shift = shift_of(candidate.ritz.value);
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
      const double last = std::fabs(found.list[many - 1].ritz.value),
                   next = std::fabs(found.list[many].ritz.value);
      const double gap = last - next;
      if (gap > kGap * last && found.list[many].ritz.residual < 0.2 * gap) return many;
      if (gap > kGap * last) return 0;
    }
    return 0;
  }

  Result<bool> bracket_first() {
    const Side side = counter_.two_sided() ? question_.side : Side::kPositive;
    auto wanted = static_cast<std::size_t>(*question_.first + rigid_);
    const BlockRows rows(second_);
    BlockLanczos lanczos = make_lanczos(rows, static_cast<Index>(wanted));
    std::size_t many = 0;
    for (int attempt = 0; attempt < kMostAttempts; ++attempt) {
      Candidates found;
      auto enough = iterate(lanczos, static_cast<Index>(wanted), [&] {
        found = candidates(lanczos, side);
        many = end_of_cluster(found, wanted);
        return many > 0;
      });
      if (!enough.ok()) return enough.status();
      if (!*enough) many = found.leading;  // the space holds no more: perhaps there are fewer
      auto pairs = pairs_of(lanczos, found.list, many);
      if (!pairs.ok()) return pairs.status();
      auto done = settle_first(lanczos, *pairs, found, many, side, wanted);
      if (!done.ok()) return done;
      if (*done) {
        // What is beyond those asked: a cluster taken in whole, or values that came up at the end.
        Offset sum = 0;
        for (const FoundValues& values : answer_.found->values) sum += values.count;
        answer_.more_than_asked = static_cast<Index>(std::max<Offset>(0, sum - static_cast<Offset>(wanted)));
        answer_.fewer_than_asked = static_cast<Index>(std::max<Offset>(0, static_cast<Offset>(wanted) - sum));
        return true;
      }
      lanczos.inject();
    }
    return false;
  }

  /// The end of the range in the gap behind the last of `many`, counted, and compared.
  Result<bool> settle_first(BlockLanczos& lanczos, const std::vector<ResidualPair>& pairs,
                            const Candidates& found, std::size_t many, Side side, std::size_t wanted) {
    double theta = 0;
    if (many == 0 || many >= found.list.size() || many < wanted) {
      // Fewer than asked: look well beyond the last, or beyond the largest of the other side.
      const std::vector<RitzValue>& all = lanczos.ritz_values();
      if (all.empty()) return false;
      theta = many > 0 ? std::fabs(found.list[many - 1].ritz.value) / 4 : std::fabs(all.front().value) / 16;
    } else {
      const double last = std::fabs(found.list[many - 1].ritz.value),
                   next = std::fabs(found.list[many].ritz.value);
      theta = next + 0.5 * (last - next);
    }
    double end = round_between(shift_of(theta * (1 - 0.2 * gap_of(found, many, theta))),
                               shift_of(theta * (1 + 0.2 * gap_of(found, many, theta))));
    if (many < wanted) {
      auto reached = look_further(end, side, static_cast<Offset>(many));
      if (!reached.ok()) return reached.status();
      if (!*reached) return false;  // there are more, too far out for this space
    }
    std::optional<CountFact> low, high;
    const CountFact zero{
        0, 0, 0, std::nullopt, counter_.base().level, counter_.base().failure_probability.value_or(0)};
    if (side != Side::kNegative) {
      auto counted = count_at(end);
      if (!counted.ok()) return counted.status();
      high = *counted;
    } else {
      high = zero;
    }
    if (counter_.two_sided()) low = zero;
    if (side != Side::kPositive) {
      auto counted = count_at(-end);
      if (!counted.ok()) return counted.status();
      low = *counted;
    }
    if (!high || (!low && counter_.two_sided())) return false;
    // Without a lower end: nothing lies below -tau, for K + tau M is definite and M semidefinite.
    const double from = low ? low->shift : 0 - tau_;
    return settle(pairs, low, *high, from, high->shift);
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
    const double next = std::fabs(found.list[many].ritz.value);
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
  std::optional<DefiniteBase> base_;
  ShiftedMatrix second_;
  std::vector<double> work_;
  double tau_ = 0;
  Index rigid_ = 0;
};

}  // namespace

Result<ResidualAnswer> bracket_by_residuals(PencilCounter& counter, const Request& request,
                                            const RunContext& context, const ResidualQuestion& question,
                                            ThreadPool& pool, Outcome& outcome) {
  return ResidualBrackets(counter, request, context, question, pool, outcome).run();
}

}  // namespace stanchion
