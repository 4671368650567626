#include "base/counter_random.hpp"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <vector>

namespace stanchion {
namespace {

using Words = std::array<std::uint64_t, 2>;

TEST(CounterRandom, PublishedKnownAnswers) {
  EXPECT_EQ(CounterRandom(0, 0).words(0), (Words{0xca00a0459843d731, 0x66c24222c9a845b5}));
  const std::uint64_t ones = ~std::uint64_t{0};
  EXPECT_EQ(CounterRandom(ones, ones).words(ones), (Words{0x65b021d60cd8310f, 0x4d02f3222f86df20}));
  EXPECT_EQ(CounterRandom(0xa4093822299f31d0, 0x13198a2e03707344).words(0x243f6a8885a308d3),
            (Words{0x0a5e742c2997341c, 0xb0f883d38000de5d}));
}

/// Largest distance between the empirical distribution of `values` and `cumulative` (Kolmogorov).
template <class Cumulative>
double distance(std::vector<double> values, const Cumulative& cumulative) {
  std::sort(values.begin(), values.end());
  double largest = 0;
  for (std::size_t i = 0; i < values.size(); ++i) {
    const double expected = cumulative(values[i]), n = static_cast<double>(values.size());
    largest = std::max({largest, std::fabs(expected - static_cast<double>(i) / n),
                        std::fabs(expected - static_cast<double>(i + 1) / n)});
  }
  return largest;
}

TEST(CounterRandom, UniformAndGaussianNumbersFollowTheirLaws) {
  constexpr std::uint64_t kCount = 100'000;
  const CounterRandom random(12);
  std::vector<double> uniform, gaussian;
  for (std::uint64_t k = 0; k < kCount; ++k) {
    uniform.push_back(random.uniform(k));
    const auto [first, second] = random.gaussians(k);
    gaussian.push_back(first);
    gaussian.push_back(second);
  }
  // 2 / sqrt(n): passed by chance with probability 1 - 7e-4; the draw itself is fixed.
  EXPECT_LT(distance(uniform, [](double x) { return x; }), 2 / std::sqrt(1.0 * kCount));
  EXPECT_LT(distance(gaussian, [](double x) { return 0.5 * std::erfc(-x / std::sqrt(2.0)); }),
            2 / std::sqrt(2.0 * kCount));
}

TEST(CounterRandom, KeysStreamsAndCombinedSeedsDiffer) {
  EXPECT_NE(CounterRandom(1).bits(5), CounterRandom(2).bits(5));
  EXPECT_NE(CounterRandom(1).bits(5), CounterRandom(1).bits(6));
  EXPECT_NE(CounterRandom(1, 0).bits(5), CounterRandom(1, 1).bits(5));
  EXPECT_NE(CounterRandom::combine(1, 2), CounterRandom::combine(2, 1));
}

}  // namespace
}  // namespace stanchion
