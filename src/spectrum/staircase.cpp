#include "spectrum/staircase.hpp"

#include <algorithm>
#include <cmath>

#include "model/shift_grid.hpp"

namespace stanchion {
namespace {

/// "n(at) >= count" or "n(at) <= count" by the fact number `source`.
struct Step {
  double at = 0;
  Offset count = 0;
  std::size_t source = 0;
};

std::vector<Step> lower_steps(const std::vector<CountFact>& facts) {
  std::vector<Step> steps;
  for (std::size_t i = 0; i < facts.size(); ++i) {
    steps.push_back({facts[i].shift, facts[i].least, i});
    if (facts[i].band) steps.push_back({facts[i].band->second, facts[i].most, i});
  }
  return steps;
}

std::vector<Step> upper_steps(const std::vector<CountFact>& facts) {
  std::vector<Step> steps;
  for (std::size_t i = 0; i < facts.size(); ++i) {
    steps.push_back({facts[i].shift, facts[i].most, i});
    if (facts[i].band) steps.push_back({facts[i].band->first, facts[i].least, i});
  }
  return steps;
}

}  // namespace

void Staircase::add(const CountFact& fact) {
  const auto at = std::upper_bound(facts_.begin(), facts_.end(), fact.shift,
                                   [](double shift, const CountFact& other) { return shift < other.shift; });
  facts_.insert(at, fact);
}

const CountFact* Staircase::at(double shift) const {
  for (const CountFact& fact : facts_) {
    if (fact.shift == shift) return &fact;
  }
  return nullptr;
}

std::vector<Contradiction> Staircase::contradictions() const {
  std::vector<Contradiction> found;
  const std::vector<Step> least = lower_steps(facts_), most = upper_steps(facts_);
  for (const Step& lower : least) {
    for (const Step& upper : most) {
      if (lower.source == upper.source) continue;
      // At one and the same shift both count the same; the end of a band may be a value itself.
      const bool same_shift = facts_[lower.source].shift == facts_[upper.source].shift &&
                              lower.at == facts_[lower.source].shift && upper.at == lower.at;
      if ((lower.at < upper.at || same_shift) && lower.count > upper.count) {
        found.push_back({facts_[lower.source].shift, facts_[upper.source].shift,
                         static_cast<Index>(lower.count), static_cast<Index>(upper.count)});
      }
    }
  }
  return found;
}

std::vector<Jump> Staircase::jumps() const {
  std::vector<Jump> jumps;
  for (std::size_t i = 0; i < facts_.size(); ++i) {
    const CountFact& here = facts_[i];
    if (i > 0 && here.least > facts_[i - 1].most) {
      jumps.push_back({facts_[i - 1].shift, here.shift, static_cast<Index>(here.least - facts_[i - 1].most)});
    }
    if (here.band && here.most > here.least) {
      jumps.push_back({here.band->first, here.band->second, static_cast<Index>(here.most - here.least)});
    }
  }
  return jumps;
}

std::optional<Staircase::Bracket> Staircase::bracket(Offset number) const {
  std::optional<Step> low, high;
  for (const Step& step : upper_steps(facts_)) {
    if (step.count < number && (!low || step.at > low->at)) low = step;
  }
  for (const Step& step : lower_steps(facts_)) {
    if (step.count >= number && (!high || step.at < high->at)) high = step;
  }
  if (!low || !high) return std::nullopt;
  Bracket bracket{low->at, high->at, Level::kProved, 0};
  const CountFact* last = nullptr;
  for (const Step* end : {&*low, &*high}) {
    const CountFact& fact = facts_[end->source];
    if (&fact == last) continue;
    last = &fact;
    if (fact.level != Level::kStatistical) continue;
    bracket.level = Level::kStatistical;
    bracket.failure_probability += fact.failure_probability;
  }
  return bracket;
}

std::vector<double> Staircase::splits(double width, double floor) const {
  std::vector<double> middles;
  for (std::size_t i = 1; i < facts_.size(); ++i) {
    const CountFact &before = facts_[i - 1], &here = facts_[i];
    if (here.least - before.most < 2) continue;
    const double low = before.band ? std::max(before.shift, before.band->second) : before.shift;
    const double high = here.band ? std::min(here.shift, here.band->first) : here.shift;
    const double size = std::max(std::fabs(low), std::fabs(high));
    if (!(high - low > width * size) || !(high - low > floor)) continue;
    const double middle = middle_shift(low, high);
    if (middle > low && middle < high) middles.push_back(middle);
  }
  return middles;
}

}  // namespace stanchion
