#include "spectrum/listed_values.hpp"

#include <gtest/gtest.h>

#include <cmath>

#include <algorithm>
#include <random>

namespace stanchion {
namespace {

ValueSpan span(double low, double high, Index count = 1, std::vector<std::size_t> members = {}) {
  return {low, high, count, std::move(members)};
}

TEST(ListedValues, TolerancesThatMeetAreOneCluster) {
  const auto clusters =
      clusters_of({span(5, 6, 1, {0}), span(1, 2, 1, {1}), span(1.5, 1.7, 1, {2}), span(2, 3, 1, {3})});
  ASSERT_EQ(clusters.size(), 2u);
  EXPECT_EQ(clusters[0].low, 1);
  EXPECT_EQ(clusters[0].high, 3);
  EXPECT_EQ(clusters[0].count, 3);
  EXPECT_EQ(clusters[0].members, (std::vector<std::size_t>{1, 2, 3}));
}

TEST(ListedValues, StretchesFillTheRangeAndSplitNothing) {
  const auto stretches =
      compare_spans({span(1, 1.1), span(3, 3.1)}, {span(1.05, 1.06), span(2, 2.01, 2)}, 0, 4);
  ASSERT_EQ(stretches.size(), 3u);
  EXPECT_EQ(stretches[0].low, 0);
  EXPECT_EQ(stretches[2].high, 4);
  for (std::size_t k = 1; k < 3; ++k) EXPECT_EQ(stretches[k].low, stretches[k - 1].high);
  EXPECT_EQ(stretches[0].listed, 1);
  EXPECT_EQ(stretches[0].certain, 1);
  EXPECT_EQ(stretches[1].listed, 0);
  EXPECT_EQ(stretches[1].certain, 2);
  EXPECT_EQ(stretches[2].listed, 1);
  EXPECT_EQ(stretches[2].certain, 0);
}

TEST(ListedValues, OneShiftAGap) {
  EXPECT_EQ(shifts_in_gaps({span(1, 1.5), span(2.5, 3)}, 0, 5), (std::vector<double>{0, 2, 5}));
  EXPECT_EQ(shifts_in_gaps({}, 0, 5), (std::vector<double>{0, 5}));
}

TEST(ListedValues, ShiftsAndEndsOfStretchesHaveFewDigits) {
  const std::vector<ValueSpan> spans{span(2.1234567890123, 2.1234567890124),
                                     span(2.2345678901234, 2.3456789012345), span(2.34567891, 2.34567892)};
  EXPECT_EQ(shifts_in_gaps(spans, 0, 3), (std::vector<double>{0, 2.2, 2.345678906, 3}));
  const auto stretches = compare_spans(spans, {}, 0, 3);
  ASSERT_EQ(stretches.size(), 3U);
  EXPECT_EQ(stretches[0].high, 2.2);
  EXPECT_EQ(stretches[1].high, 2.345678906);
  // No room for fewer digits, or for any number at all between the two.
  const double low = 1, next = std::nextafter(low, 2);
  const double found = shifts_in_gaps({span(0.5, low), span(next, 2)}, 0, 3)[1];
  EXPECT_TRUE(found == low || found == next);
}

TEST(ListedValues, EachNeedsAValueOfItsOwn) {
  const std::vector<ValueSpan> certain{{1, 1, 2, {}}, {2, 2, 1, {}}};
  EXPECT_TRUE(each_has_its_own({{0.9, 1.1, 1, {}}, {0.9, 2.1, 1, {}}, {0.5, 1.5, 1, {}}}, certain));
  EXPECT_FALSE(
      each_has_its_own({{0.9, 1.1, 1, {}}, {0.9, 1.1, 1, {}}, {0.5, 1.5, 1, {}}}, certain));  // three at 1
  EXPECT_FALSE(
      each_has_its_own({{0.9, 1.1, 1, {}}, {1.2, 1.8, 1, {}}, {1.9, 2.1, 1, {}}}, certain));  // none there
  EXPECT_TRUE(each_has_its_own({{0.9, 3, 1, {}}, {0.9, 1, 1, {}}}, certain));
}

/// Sure is what holds wherever in their intervals the values are: tried at all ends of all intervals.
TEST(ListedValues, SurelyMeansWhereverInTheirIntervalsTheValuesAre) {
  std::mt19937 random(12);
  int sure = 0, open = 0;
  for (int round = 0; round < 4000; ++round) {
    const int n = 1 + static_cast<int>(random() % 4);
    std::vector<ValueSpan> listed, certain;
    double at = 0;
    for (int k = 0; k < n; ++k) {
      const double low = at + 1 + static_cast<double>(random() % 3);
      at = low + static_cast<double>(random() % 3);
      certain.push_back(span(low, at));
      const double from = low - static_cast<double>(random() % 3);
      listed.push_back(span(from, std::max(from, at + static_cast<double>(random() % 4) - 0.5)));
    }
    std::shuffle(listed.begin(), listed.end(), random);
    bool always = true;
    for (int ends = 0; ends < 1 << n; ++ends) {
      std::vector<ValueSpan> values;
      for (int k = 0; k < n; ++k) {
        const ValueSpan& interval = certain[static_cast<std::size_t>(k)];
        const double value = (ends >> k) % 2 == 0 ? interval.low : interval.high;
        values.push_back(span(value, value));
      }
      always = always && each_has_its_own(listed, values);
    }
    const bool said = each_surely_has_its_own(listed, certain);
    EXPECT_TRUE(!said || always);
    if (n == 1) {
      EXPECT_EQ(said, always);
    }
    said ? ++sure : ++open;
  }
  EXPECT_GT(sure, 500);
  EXPECT_GT(open, 500);
}

/// Counts at every end against the assignment of values that are known.
TEST(ListedValues, CountsAtTheEndsPlaceAsKnownValuesDo) {
  std::mt19937 random(11);
  int shown = 0, refuted = 0;
  for (int round = 0; round < 4000; ++round) {
    const int n = 1 + static_cast<int>(random() % 6);
    std::vector<ValueSpan> listed, certain;
    std::vector<double> values;
    for (int k = 0; k < n; ++k) {
      const double low = static_cast<double>(random() % 20);
      listed.push_back(span(low, low + 1 + static_cast<double>(random() % 6)));
      // In its own span, mostly.
      values.push_back(random() % 8 > 0 ? low + 0.5 : static_cast<double>(random() % 24) + 0.5);
    }
    std::sort(values.begin(), values.end());
    for (const double value : values) certain.push_back(span(value, value));
    std::vector<CountFact> facts;
    for (int at = -1; at <= 30; ++at) {
      const Offset below = std::lower_bound(values.begin(), values.end(), at) - values.begin();
      facts.push_back({static_cast<double>(at), below, below, std::nullopt, Level::kProved, 0});
    }
    const bool own = each_has_its_own(listed, certain);
    EXPECT_EQ(placement(listed, facts), own ? Placement::kShown : Placement::kRefuted);
    own ? ++shown : ++refuted;
    // Fewer facts may leave it open, never turn it round.
    std::vector<CountFact> fewer{facts.front()};
    for (std::size_t k = 1; k + 1 < facts.size(); ++k) {
      if (random() % 2 == 0) fewer.push_back(facts[k]);
    }
    fewer.push_back(facts.back());
    EXPECT_NE(placement(listed, fewer), own ? Placement::kRefuted : Placement::kShown);
  }
  EXPECT_GT(shown, 500);
  EXPECT_GT(refuted, 500);
}

}  // namespace
}  // namespace stanchion
