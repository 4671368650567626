// Memory that one factorization leaves for the next changes no bit of what comes out.
#include <gtest/gtest.h>

#include <thread>

#include "support/factored.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

void expect_same(const Factorization& with, const Factorization& without) {
  EXPECT_EQ(with.stopped, without.stopped);
  EXPECT_EQ(with.breakdown, without.breakdown);
  EXPECT_FALSE(with.fault);
  if (with.stopped || with.breakdown) return;
  EXPECT_EQ(with.signs.negative, without.signs.negative);
  EXPECT_EQ(with.signs.zero, without.signs.zero);
  EXPECT_EQ(with.signs.positive, without.signs.positive);
  EXPECT_EQ(with.error_bound, without.error_bound);
  EXPECT_EQ(with.delayed_pivots, without.delayed_pivots);
  ASSERT_EQ(with.factor.has_value(), without.factor.has_value());
  if (!with.factor) return;
  for (std::size_t f = 0; f < with.factor->fronts.size(); ++f) {
    const FactorFront& a = with.factor->fronts[f];
    const FactorFront& b = without.factor->fronts[f];
    ASSERT_TRUE(std::equal(a.lower.begin(), a.lower.end(), b.lower.begin(), b.lower.end()));
    ASSERT_TRUE(std::equal(a.diagonal.begin(), a.diagonal.end(), b.diagonal.begin(), b.diagonal.end()));
  }
}

/// Shifts between which delays come and go, definite attempts that stop half way, kept factors, both scalars.
std::vector<std::pair<double, FactorOptions>> questions() {
  std::vector<std::pair<double, FactorOptions>> all;
  for (const double offset : {0.0, 6.0, 0.5, 2.01, 6.0, 11.9, 0.0}) {
    for (int kind = 0; kind < 4; ++kind) {
      FactorOptions options;
      options.definite = kind == 1;
      options.keep_factor = kind == 2;
      options.single = kind == 3;
      all.emplace_back(offset, options);
    }
  }
  return all;
}

TEST(Workspace, ChangesNoBit) {
  for (const int threads : {1, 3}) {
    const auto prepared = test::prepare(test::laplacian(11, 10, 9), threads);
    const auto workspace = std::make_shared<FactorWorkspace>();
    for (auto& [offset, options] : questions()) {
      const Factorization without = prepared.factor(offset, options);
      options.workspace = workspace;
      expect_same(prepared.factor(offset, options), without);
    }
  }
}

TEST(Workspace, ServesSeveralFactorizationsAtOnce) {
  const auto prepared = test::prepare(test::laplacian(10, 9, 8), 1);
  const auto workspace = std::make_shared<FactorWorkspace>();
  std::vector<std::thread> lanes;
  for (int lane = 0; lane < 3; ++lane) {
    lanes.emplace_back([&] {
      ThreadPool pool(1);
      for (const auto& [offset, asked] : questions()) {
        FactorOptions options = asked;
        const auto without = factorize(prepared.analysis, prepared.shifted(offset), options, pool);
        options.workspace = workspace;
        const auto with = factorize(prepared.analysis, prepared.shifted(offset), options, pool);
        ASSERT_TRUE(with.ok() && without.ok());
        expect_same(*with, *without);
      }
    });
  }
  for (std::thread& lane : lanes) lane.join();
}

TEST(Workspace, IsOfUseAfterARunThatMetItsMemoryCap) {
  const auto prepared = test::prepare(test::laplacian(11, 10, 9), 2);
  FactorOptions options;
  options.workspace = std::make_shared<FactorWorkspace>();
  const Factorization right = prepared.factor(0.5, options);
  options.memory_cap_bytes = right.peak_bytes / 2;
  const auto refused = factorize(prepared.analysis, prepared.shifted(0.5), options, *prepared.pool);
  ASSERT_FALSE(refused.ok());
  EXPECT_EQ(refused.status().kind(), StatusKind::kResourceLimit);
  options.memory_cap_bytes.reset();
  expect_same(prepared.factor(0.5, options), right);
}

}  // namespace
}  // namespace stanchion
