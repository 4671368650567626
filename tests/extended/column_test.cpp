// The column of very many beam elements: hopeless in double, plain in double-double. Source of the loads:
// Euler's closed form of the pinned column, k^2 pi^2 E I / L^2.
#include <gtest/gtest.h>

#include "base/clock.hpp"
#include "extended/factorize.hpp"
#include "extended/pencil.hpp"

namespace stanchion {
namespace {

void expect_euler_loads(Offset unknowns, int threads) {
  const auto specimen = make_specimen("column", unknowns, {});
  ASSERT_TRUE(specimen.ok());
  const Index n = specimen->stiffness.rows;
  ASSERT_EQ(n, unknowns);
  const test::Pencil pencil = test::make_pencil(*specimen, threads);
  OffsetOptions options;
  options.extended = true;

  options.definite_first = true;
  const auto stiffness = certify_by_offsets(pencil.analysis, pencil.at(0), options, *pencil.pool);
  ASSERT_TRUE(stiffness.ok());
  EXPECT_EQ(stiffness->certificate.level, Level::kProved);
  EXPECT_EQ(stiffness->inertia.positive, n);
  EXPECT_EQ(stiffness->factorizations, 1);
  EXPECT_GT(stiffness->certificate.smallest_eigenvalue_of_k_above.value_or(0), 0);
  ::testing::Test::RecordProperty("definite_seconds", std::to_string(stiffness->seconds));

  options.definite_first = false;
  ASSERT_FALSE(specimen->expected.values.empty());
  const double first_load = specimen->expected.values.front().value;
  for (Index loads = 1; loads <= 8; ++loads) {
    const double midpoint = first_load * (loads * loads + (loads + 1) * (loads + 1)) / 2;
    const auto found = certify_by_offsets(pencil.analysis, pencil.at(midpoint), options, *pencil.pool);
    ASSERT_TRUE(found.ok());
    EXPECT_EQ(found->certificate.level, Level::kProved);
    EXPECT_EQ(found->inertia.negative, loads);
    EXPECT_EQ(found->inertia.zero, 0);
    EXPECT_EQ(found->inertia.positive, n - loads);
    ::testing::Test::RecordProperty("seconds_" + std::to_string(loads), std::to_string(found->seconds));
  }
}

TEST(Column, EightCriticalLoadsOfTenThousandElements) {
  expect_euler_loads(30'000, 1);
}

TEST(Column, EightCriticalLoadsOfAHundredThousandElements) {
  expect_euler_loads(300'000, available_processors());
}

}  // namespace
}  // namespace stanchion
