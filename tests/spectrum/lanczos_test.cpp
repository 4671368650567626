#include "spectrum/block_lanczos.hpp"

#include <gtest/gtest.h>

#include <cmath>

namespace stanchion {
namespace {

/// A diagonal operator.
BlockLanczos lanczos_of(const std::vector<double>& values, Index columns, ThreadPool& pool) {
  const auto apply = [values](double* block) {
    for (std::size_t i = 0; i < values.size(); ++i) {
      for (std::size_t v = 0; v < kBlockVectors; ++v) block[i * kBlockVectors + v] *= values[i];
    }
  };
  return {apply, static_cast<Index>(values.size()), columns, 7, pool};
}

std::vector<double> ladder(Index n) {
  std::vector<double> values;
  for (Index i = 0; i < n; ++i) values.push_back(1.0 / (1 + i));
  return values;
}

TEST(BlockLanczos, SmallSpacesAreTakenWhole) {
  ThreadPool pool(1);
  std::vector<double> values = ladder(50);
  values[10] = -3;
  BlockLanczos lanczos = lanczos_of(values, 48, pool);
  EXPECT_FALSE(lanczos.step({4, 4}));
  const auto& ritz = lanczos.ritz_values();
  ASSERT_EQ(ritz.size(), 50u);
  EXPECT_NEAR(ritz[0].value, -3, 1e-14);
  EXPECT_NEAR(ritz[1].value, 1, 1e-14);
}

TEST(BlockLanczos, ClustersAndBothSignsComeOut) {
  ThreadPool pool(1);
  std::vector<double> values = ladder(2000);
  for (std::size_t k = 100; k < 106; ++k) values[k] = 0.75;  // sixfold
  values[200] = -0.9;
  BlockLanczos lanczos = lanczos_of(values, 160, pool);
  for (int k = 0; k < 15; ++k) ASSERT_TRUE(lanczos.step({16, 8}));
  const auto& ritz = lanczos.ritz_values();
  EXPECT_NEAR(ritz[0].value, 1, 1e-12);
  EXPECT_NEAR(ritz[1].value, -0.9, 1e-12);
  for (std::size_t k = 2; k < 8; ++k) EXPECT_NEAR(ritz[k].value, 0.75, 1e-12);
  for (std::size_t k = 0; k < 8; ++k) EXPECT_LT(ritz[k].residual, 1e-9);
  EXPECT_NEAR(ritz[8].value, 0.5, 1e-10);
}

// Forty values of 1 and a block of eight: fresh vectors are the whole space where that is small.
TEST(BlockLanczos, FreshVectorsOfASmallSpaceAreAllOfIt) {
  ThreadPool pool(1);
  std::vector<double> values = ladder(900);
  for (std::size_t k = 1; k < 40; ++k) values[k] = 1;
  BlockLanczos lanczos = lanczos_of(values, 64, pool);
  for (int k = 0; k < 6; ++k) ASSERT_TRUE(lanczos.step({16, 8}));
  EXPECT_LT(lanczos.ritz_values()[39].value, 0.9);  // missed, and looked at
  lanczos.inject();
  EXPECT_TRUE(lanczos.whole());
  const auto& ritz = lanczos.ritz_values();
  ASSERT_EQ(ritz.size(), 900U);
  for (std::size_t k = 0; k < 40; ++k) EXPECT_NEAR(ritz[k].value, 1, 1e-13);
  EXPECT_NEAR(ritz[40].value, 1.0 / 41, 1e-13);
}

TEST(BlockLanczos, AFullBasisStartsAgainFromItsBest) {
  ThreadPool pool(1);
  BlockLanczos lanczos = lanczos_of(ladder(3000), 64, pool);
  for (int k = 0; k < 40; ++k) {
    ASSERT_TRUE(lanczos.step({16, 4}));
    ASSERT_LE(lanczos.columns(), 64);
  }
  const auto& ritz = lanczos.ritz_values();
  for (int k = 0; k < 10; ++k) {
    EXPECT_NEAR(ritz[static_cast<std::size_t>(k)].value, 1.0 / (1 + k), 1e-11);
    EXPECT_LT(ritz[static_cast<std::size_t>(k)].residual, 1e-8);
  }
  // Vectors of a diagonal operator are unit vectors.
  std::vector<double> block;
  lanczos.vectors({ritz[2]}, block);
  EXPECT_NEAR(std::fabs(block[2 * kBlockVectors]), 1, 1e-10);
}

TEST(BlockLanczos, SameBitsForAnyNumberOfThreads) {
  ThreadPool one(1), three(3);
  BlockLanczos a = lanczos_of(ladder(5000), 64, one), b = lanczos_of(ladder(5000), 64, three);
  for (int k = 0; k < 12; ++k) {
    a.step({16, 4});
    b.step({16, 4});
  }
  const auto &x = a.ritz_values(), &y = b.ritz_values();
  ASSERT_EQ(x.size(), y.size());
  for (std::size_t k = 0; k < x.size(); ++k) EXPECT_EQ(x[k].value, y[k].value);
}

}  // namespace
}  // namespace stanchion
