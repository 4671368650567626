#include "engine/residual_proof.hpp"

#include <algorithm>
#include <cmath>
#include <tuple>

#include "base/fault_words.hpp"
#include "model/shift_grid.hpp"

namespace stanchion {
namespace {

Status too_many() {
  return Status::internal(
      std::string("more values lie in disjoint residual intervals than a certified count allows: ") +
      kMachineOrProgram);
}

/// Leaves out the outermost `many` of `values`, which are ordered away from `end`: they lie beyond it.
/// `sign`: 1 for an upper end. An interval that holds the end stops there. False where intervals say
/// otherwise.
bool leave_out(std::vector<FoundValues>& values, double end, Offset many, int sign) {
  const auto inner_end = [&](const FoundValues& v) { return sign > 0 ? v.low : -v.high; };
  const auto outer_end = [&](const FoundValues& v) { return sign > 0 ? v.high : -v.low; };
  const double reach = sign * end;
  while (!values.empty() && outer_end(values.back()) > reach) {
    FoundValues& last = values.back();
    const Offset beyond = inner_end(last) >= reach ? last.count : std::min<Offset>(many, last.count);
    if (beyond > many) return false;
    many -= beyond;
    last.count -= static_cast<Index>(beyond);
    if (last.count == 0) {
      values.pop_back();
      continue;
    }
    (sign > 0 ? last.high : last.low) = end;
    last.value = std::clamp(last.value, last.low, last.high);
    if (static_cast<Index>(last.modes.size()) > last.count)
      last.modes.clear();  // whose they are is not known
  }
  return many == 0;
}

/// Ends of an interval by their distance from 0.
double inner(const FoundValues& values) {
  return values.low <= 0 && values.high >= 0 ? 0 : std::min(std::fabs(values.low), std::fabs(values.high));
}
double outer(const FoundValues& values) {
  return std::max(std::fabs(values.low), std::fabs(values.high));
}

void weaken(CountedRange& range, Level level, double failure_probability) {
  range.level = std::min(range.level, level);
  if (failure_probability > 0)
    range.failure_probability = range.failure_probability.value_or(0) + failure_probability;
}

/// What lies between new ends of a range and the old ones is known from its intervals, so from their base
/// too.
void rest_on_intervals(FoundRange& found) {
  CountedRange& range = *found.complete;
  double failure[2] = {0, 0};
  for (const FoundValues& values : found.values) {
    range.level = std::min(range.level, values.level);
    double& side = failure[values.low < 0];
    if (values.level == Level::kStatistical) side = std::max(side, values.failure_probability);
  }
  weaken(range, range.level, failure[0] + failure[1]);
}

}  // namespace

Result<std::optional<CountFact>> ResidualProof::count_at(double shift) {
  if (const CountFact* known = counts_.at(shift)) return std::optional<CountFact>(*known);
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
std::pair<double, double> ResidualProof::values_of(const EigenvalueGroup& group) const {
  const double low = 1 / group.high, high = 1 / group.low;
  const auto outwards = [&](double value, double part, int direction) {
    return value + direction * 0x1p-51 * (std::fabs(value) + 2 * std::fabs(part) + 2 * std::fabs(base_->tau));
  };
  return {outwards(low - base_->tau, low, -1), outwards(high - base_->tau, high, 1)};
}

/// A = B - (shift + tau) C, so that a vector with C x = theta B x has x^T A x = (1 - (shift + tau) theta)
/// x^T B x. Vectors behind the shift have an x^T B x / x^T x about as small as the half of the pairs nearest
/// to it.
std::optional<double> ResidualProof::room_at(double shift, const std::vector<ResidualPair>& pairs,
                                             double next) const {
  std::vector<std::pair<double, double>> roots;
  for (const ResidualPair& pair : pairs) {
    if (pair.theta * next > 0) roots.emplace_back(std::fabs(pair.theta), pair.norm / pair.length);
  }
  std::sort(roots.begin(), roots.end());
  double least = INFINITY;
  for (std::size_t k = 0; 2 * k < roots.size(); ++k) least = std::min(least, roots[k].second);
  const double room = least * least * (1 - (shift + base_->tau) * next);
  if (next == 0 || !std::isfinite(room) || !(room > 0)) return std::nullopt;
  return room;
}

Result<std::optional<CountFact>> ResidualProof::count_expecting(double shift, Offset expected,
                                                                const std::vector<ResidualPair>& pairs,
                                                                double next) {
  if (counts_.at(shift)) return count_at(shift);
  auto most = counter_.at_most(shift, static_cast<Index>(expected), room_at(shift, pairs, next));
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

Result<std::optional<CountFact>> ResidualProof::remember(const CountFact& fact) {
  counts_.add(fact);
  if (counts_.contradictions().empty()) return std::optional(fact);
  return Status::internal(std::string("certified counts contradict each other: ") + kMachineOrProgram);
}

bool ResidualProof::held_by_one(const std::vector<ResidualPair>& pairs, double end) const {
  for (const EigenvalueGroup& group : disjoint_groups(base_->base, pairs)) {
    if (!(group.low * group.high > 0)) continue;
    const auto [low, high] = values_of(group);
    if (low <= end && high >= end) return true;
  }
  return false;
}

GroupSides ResidualProof::groups_inside(const std::vector<ResidualPair>& pairs, double from,
                                        double to) const {
  GroupSides sides;
  for (EigenvalueGroup& group : disjoint_groups(base_->base, pairs)) {
    if (!(group.low * group.high > 0) || !std::isfinite(group.low) || !std::isfinite(group.high)) continue;
    const auto [low_end, high_end] = values_of(group);
    if (!(low_end > from) || !(high_end < to)) continue;
    (group.low > 0 ? sides.above : sides.below).push_back(std::move(group));
  }
  return sides;
}

FoundValues ResidualProof::found_of(const std::vector<ResidualPair>& pairs,
                                    const EigenvalueGroup& group) const {
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

Result<std::optional<FoundRange>> ResidualProof::settle(const std::vector<ResidualPair>& pairs,
                                                        const std::optional<CountFact>& low,
                                                        const CountFact& high, double from, double to) const {
  const CountedRange range = counted_range(low, high, from, to);
  if (!range.count) return std::optional<FoundRange>();
  GroupSides sides = groups_inside(pairs, from, to);
  const Offset sum = GroupSides::number(sides.above) + GroupSides::number(sides.below);
  if (sum > *range.count) return too_many();
  if (sum < *range.count) return std::optional<FoundRange>();
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
  return std::optional(std::move(found));
}

/// The groups are all that is between the two ends: each is alone between its neighbours, and the outermost
/// have an end beside them, or nothing up to infinity. The ends of theta are rounded inwards.
void ResidualProof::sharpen_all(const std::vector<ResidualPair>& pairs, double from, double to,
                                GroupSides& sides) const {
  const double pole = -base_->tau;
  const auto inwards = [&](double shift, int direction) {
    const double theta = base_->theta_of(shift);
    return theta + direction * 0x1p-50 * std::fabs(theta);
  };
  sharpen(base_->base, pairs, inwards(to, 1), from > pole ? inwards(from, -1) : INFINITY, sides.above);
  sharpen(base_->base, pairs, to < pole ? inwards(to, 1) : -INFINITY, inwards(from, -1), sides.below);
}

FoundRange joined(FoundRange below, FoundRange above) {
  FoundRange all = std::move(below);
  for (FoundValues& values : above.values) all.values.push_back(std::move(values));
  CountedRange& range = *all.complete;
  range.to = above.complete->to;
  range.count = *range.count + *above.complete->count;
  weaken(range, above.complete->level, above.complete->failure_probability.value_or(0));
  return all;
}

FoundRange nearest_of(FoundRange all, Index wanted) {
  std::sort(all.values.begin(), all.values.end(),
            [](const FoundValues& a, const FoundValues& b) { return inner(a) < inner(b); });
  Index taken = 0;
  std::size_t many = 0;
  double reach = 0;
  const auto goes_on = [&] { return many < all.values.size() && !(inner(all.values[many]) > reach); };
  for (; many < all.values.size() && (taken < wanted || goes_on()); ++many) {
    taken += all.values[many].count;
    reach = std::max(reach, outer(all.values[many]));
  }
  if (many < all.values.size()) {
    rest_on_intervals(all);
    CountedRange& range = *all.complete;
    const double end = shortest_between(reach, inner(all.values[many]));
    range.from = -end;
    range.to = end;
    range.count = taken;
    all.values.erase(all.values.begin() + static_cast<std::ptrdiff_t>(many), all.values.end());
  }
  std::sort(all.values.begin(), all.values.end(),
            [](const FoundValues& a, const FoundValues& b) { return a.low < b.low; });
  return all;
}

Result<FoundRange> cut_by_counts(FoundRange all, const std::optional<CountFact>& outer_low,
                                 const CountFact& outer_high, const std::optional<CountFact>& low,
                                 const CountFact& high) {
  const CountedRange whole = *all.complete;
  CountedRange range = counted_range(low, high, low ? low->shift : whole.from, high.shift);
  if (!leave_out(all.values, high.shift, outer_high.least - high.least, 1)) return too_many();
  if (low) {
    std::reverse(all.values.begin(), all.values.end());
    if (!leave_out(all.values, low->shift, low->least - outer_low->least, -1)) return too_many();
    std::reverse(all.values.begin(), all.values.end());
  }
  Index number = 0;
  for (FoundValues& values : all.values) {
    number += values.count;
    if (range.level != Level::kStatistical) continue;
    values.level = Level::kStatistical;
    values.failure_probability += range.failure_probability.value_or(0);
  }
  if (!range.count || number != *range.count) return too_many();
  weaken(range, whole.level, whole.failure_probability.value_or(0));
  all.complete = range;
  return all;
}

FoundRange cut_to(FoundRange all, double from, double to, Index& on_ends) {
  on_ends = 0;
  CountedRange& range = *all.complete;
  if (range.from == from && range.to == to) return all;
  rest_on_intervals(all);
  double lowest = to, highest = from;             // of what is kept
  double before = range.from, behind = range.to;  // the nearest left out
  std::vector<FoundValues> kept;
  Index number = 0;
  for (FoundValues& values : all.values) {
    if (values.high < from) {
      before = std::max(before, values.high);
    } else if (values.low > to) {
      behind = std::min(behind, values.low);
    } else {
      lowest = std::min(lowest, values.low);
      highest = std::max(highest, values.high);
      if ((range.from < from && values.low <= from) || (range.to > to && values.high >= to))
        on_ends += values.count;
      number += values.count;
      kept.push_back(std::move(values));
    }
  }
  if (range.from < from) range.from = lowest > from ? from : shortest_between(before, lowest);
  if (range.to > to) range.to = highest < to ? to : shortest_between(highest, behind);
  range.count = number;
  all.values = std::move(kept);
  return all;
}

}  // namespace stanchion
