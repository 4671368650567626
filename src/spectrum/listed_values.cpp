#include "spectrum/listed_values.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "model/shift_grid.hpp"

namespace stanchion {
namespace {

void sort_by_low(std::vector<ValueSpan>& spans) {
  std::stable_sort(spans.begin(), spans.end(),
                   [](const ValueSpan& a, const ValueSpan& b) { return a.low < b.low; });
}

/// In the middle half of what lies between the two; of few digits, for it is what the answer names.
double amid(double a, double b) {
  const double quarter = (b - a) / 4;
  return quarter > 0 ? shortest_between(a + quarter, b - quarter) : a + (b - a) / 2;
}

}  // namespace

std::vector<ValueSpan> clusters_of(std::vector<ValueSpan> values) {
  sort_by_low(values);
  std::vector<ValueSpan> clusters;
  for (ValueSpan& value : values) {
    if (clusters.empty() || value.low > clusters.back().high) {
      clusters.push_back(std::move(value));
      continue;
    }
    ValueSpan& cluster = clusters.back();
    cluster.high = std::max(cluster.high, value.high);
    cluster.count += value.count;
    cluster.members.insert(cluster.members.end(), value.members.begin(), value.members.end());
  }
  return clusters;
}

std::vector<Stretch> compare_spans(const std::vector<ValueSpan>& listed,
                                   const std::vector<ValueSpan>& certain, double from, double to) {
  struct Item {
    double low, high;
    bool is_listed;
    std::size_t number;
  };
  std::vector<Item> items;
  for (std::size_t k = 0; k < listed.size(); ++k) items.push_back({listed[k].low, listed[k].high, true, k});
  for (std::size_t k = 0; k < certain.size(); ++k)
    items.push_back({certain[k].low, certain[k].high, false, k});
  std::stable_sort(items.begin(), items.end(), [](const Item& a, const Item& b) { return a.low < b.low; });
  std::vector<Stretch> stretches;
  for (const Item& item : items) {
    if (stretches.empty() || item.low > stretches.back().high) {
      stretches.emplace_back();
      stretches.back().low = item.low;
      stretches.back().high = item.high;
    }
    Stretch& stretch = stretches.back();
    stretch.high = std::max(stretch.high, item.high);
    if (item.is_listed) {
      const ValueSpan& span = listed[item.number];
      stretch.listed += span.count;
      stretch.members.insert(stretch.members.end(), span.members.begin(), span.members.end());
    } else {
      stretch.certain += certain[item.number].count;
      stretch.certain_spans.push_back(item.number);
    }
  }
  for (std::size_t k = 0; k < stretches.size(); ++k) {
    const double end = k + 1 < stretches.size() ? amid(stretches[k].high, stretches[k + 1].low) : to;
    stretches[k].low = k > 0 ? stretches[k - 1].high : from;
    stretches[k].high = end;
  }
  return stretches;
}

namespace {

/// The smallest and the largest value that a certain span may have to share with a listed one.
struct Needed {
  double low, high;
};

/// A listed span serves neighbouring certain ones only, so taking for each certain value the listed span that
/// ends first is best (Glover, Naval Res. Logist. Q. 14 (1967)). A listed span serves where it begins at or
/// before `needed(span).low` and ends at or behind `needed(span).high`; both ascend with the span.
template <class Need>
bool all_served(const std::vector<ValueSpan>& listed, const std::vector<ValueSpan>& certain,
                const Need& needed) {
  std::vector<ValueSpan> waiting = listed;
  sort_by_low(waiting);
  std::vector<double> open;  // ends of listed spans that have begun and have no value yet
  std::size_t next = 0, served = 0;
  for (const ValueSpan& span : certain) {
    const Needed need = needed(span);
    while (next < waiting.size() && waiting[next].low <= need.low) open.push_back(waiting[next++].high);
    std::sort(open.begin(), open.end());
    if (!open.empty() && open.front() < need.high) return false;  // its values are all behind it
    const std::size_t many = std::min(open.size(), static_cast<std::size_t>(span.count));
    open.erase(open.begin(), open.begin() + static_cast<std::ptrdiff_t>(many));
    served += many;
  }
  return served == listed.size();
}

}  // namespace

bool each_has_its_own(const std::vector<ValueSpan>& listed, const std::vector<ValueSpan>& certain) {
  return all_served(listed, certain, [](const ValueSpan& span) { return Needed{span.high, span.low}; });
}

bool each_surely_has_its_own(const std::vector<ValueSpan>& listed, const std::vector<ValueSpan>& certain) {
  return all_served(listed, certain, [](const ValueSpan& span) { return Needed{span.low, span.high}; });
}

std::vector<double> shifts_in_gaps(const std::vector<ValueSpan>& clusters, double from, double to) {
  std::vector<double> shifts{from};
  for (std::size_t k = 1; k < clusters.size(); ++k)
    shifts.push_back(amid(clusters[k - 1].high, clusters[k].low));
  shifts.push_back(to);
  return shifts;
}

Placement placement(const std::vector<ValueSpan>& listed, const std::vector<CountFact>& facts) {
  // Least and most number of values below each end, from the facts on its two sides. `most` counts a value on
  // the shift itself, too.
  const auto below = [&](double at) {
    std::pair<Offset, Offset> number{std::numeric_limits<Offset>::min() / 4,
                                     std::numeric_limits<Offset>::max() / 4};
    for (const CountFact& fact : facts) {
      if (fact.shift <= at) number.first = std::max(number.first, fact.least);
      if (fact.shift >= at) number.second = std::min(number.second, fact.most);
    }
    return number;
  };
  std::vector<std::pair<Offset, Offset>> at_low, at_high;
  for (const ValueSpan& span : listed) {
    at_low.push_back(below(span.low));
    at_high.push_back(below(span.high));
  }
  Placement answer = Placement::kShown;
  for (std::size_t i = 0; i < listed.size(); ++i) {
    for (std::size_t j = 0; j < listed.size(); ++j) {
      Offset contained = 0;
      for (const ValueSpan& span : listed) {
        if (span.low >= listed[i].low && span.high <= listed[j].high) contained += span.count;
      }
      if (contained == 0) continue;
      if (contained > at_high[j].second - at_low[i].first) return Placement::kRefuted;
      if (contained > at_high[j].first - at_low[i].second) answer = Placement::kOpen;
    }
  }
  return answer;
}

}  // namespace stanchion
