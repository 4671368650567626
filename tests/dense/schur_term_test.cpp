// A Schur complement much larger than what is taken from it.
#include <gtest/gtest.h>

#include "dense/front_makers.hpp"

namespace stanchion {
namespace {

/// Unit pivots, each coupled to one border row whose diagonal is 1.5: a single update is below half a unit of
/// it.
TEST(SchurTerm, TheBoundHoldsWhenTheSchurComplementDwarfsItsUpdates) {
  for (const Index pivots : {10, 64, 256, 600}) {
    const auto entry = [&](Index i, Index j) {
      if (i == j) return i == pivots ? 1.5 : 1.0;
      return i == pivots ? 0x1.6p-27 : 0.0;
    };
    test::FrontCase front(test::full_from(pivots + 1, entry), pivots);
    front.run({false, 0.01, true});
    EXPECT_EQ(front.result.eliminated, pivots);
    front.expect_bound_holds();
    const double without = front.claimed(false).back();
    EXPECT_GT(front.claimed(true).back(), 3 * without);
  }
}

}  // namespace
}  // namespace stanchion
