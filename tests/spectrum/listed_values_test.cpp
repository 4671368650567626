#include "spectrum/listed_values.hpp"

#include <gtest/gtest.h>

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

TEST(ListedValues, EachNeedsAValueOfItsOwn) {
  const std::vector<ValueSpan> certain{{1, 1, 2, {}}, {2, 2, 1, {}}};
  EXPECT_TRUE(each_has_its_own({{0.9, 1.1, 1, {}}, {0.9, 2.1, 1, {}}, {0.5, 1.5, 1, {}}}, certain));
  EXPECT_FALSE(
      each_has_its_own({{0.9, 1.1, 1, {}}, {0.9, 1.1, 1, {}}, {0.5, 1.5, 1, {}}}, certain));  // three at 1
  EXPECT_FALSE(
      each_has_its_own({{0.9, 1.1, 1, {}}, {1.2, 1.8, 1, {}}, {1.9, 2.1, 1, {}}}, certain));  // none there
  EXPECT_TRUE(each_has_its_own({{0.9, 3, 1, {}}, {0.9, 1, 1, {}}}, certain));
}

}  // namespace
}  // namespace stanchion
