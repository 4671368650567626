// Triangles of L on blocks of eight vectors: what comes out satisfies the system to the bound that the error
// analysis uses (Higham, Accuracy and Stability of Numerical Algorithms, 2nd ed., Lemma 8.4), for every width
// and instruction set.
#include "numeric/block_kernels.hpp"

#include <gtest/gtest.h>

#include <cmath>
#include <vector>

#include "support/generators.hpp"

namespace stanchion {
namespace {

constexpr Index kV = kBlockVectors, kMost = 64, kLeading = 71;

template <class Scalar>
class Triangle : public testing::Test {};
using Precisions = testing::Types<double, float>;
TYPED_TEST_SUITE(Triangle, Precisions);

/// Entries at column * kLeading + row; what is not below the diagonal must not be looked at.
template <class Scalar>
std::vector<Scalar> lower_triangle(Index columns, test::Random& random) {
  std::vector<Scalar> lower(static_cast<std::size_t>(kLeading * columns), std::nanf(""));
  for (Index k = 0; k < columns; ++k) {
    for (Index i = k + 1; i < columns; ++i)
      lower[static_cast<std::size_t>(k * kLeading + i)] = static_cast<Scalar>(test::uniform(random, -1, 1));
  }
  return lower;
}

std::vector<double> block(Index rows, test::Random& random) {
  std::vector<double> values(static_cast<std::size_t>(rows * kV));
  for (double& value : values) value = test::uniform(random, -1, 1);
  return values;
}

template <class Scalar>
void expect_solved(const PanelKernels<Scalar>& kernels, Index columns) {
  SCOPED_TRACE(columns);
  test::Random random(static_cast<unsigned>(columns));
  const std::vector<Scalar> lower = lower_triangle<Scalar>(columns, random);
  const std::vector<double> right = block(columns, random), sums = block(columns, random);
  const double gamma = (columns + 2) * 0x1p-53 / (1 - (columns + 2) * 0x1p-53);
  const auto entry = [&](Index i, Index k) {
    return static_cast<long double>(lower[static_cast<std::size_t>(k * kLeading + i)]);
  };
  std::vector<double> x = right, t = right;
  kernels.solve_triangle(lower.data(), kLeading, columns, x.data());
  kernels.solve_transposed_triangle(lower.data(), kLeading, columns, sums.data(), t.data());
  for (Index i = 0; i < columns; ++i) {
    for (Index v = 0; v < kV; ++v) {
      const auto at = [&](const std::vector<double>& values, Index row) {
        return static_cast<long double>(values[static_cast<std::size_t>(row * kV + v)]);
      };
      // L x = right and L^T t = right - sums, row by row.
      long double forward = at(x, i) - at(right, i), size = std::fabs(at(x, i));
      for (Index k = 0; k < i; ++k) {
        forward += entry(i, k) * at(x, k);
        size += std::fabs(entry(i, k) * at(x, k));
      }
      EXPECT_LE(std::fabs(forward), gamma * size) << i;
      long double backward = at(t, i) - at(right, i) + at(sums, i);
      size = std::fabs(at(t, i)) + std::fabs(at(sums, i));
      for (Index k = i + 1; k < columns; ++k) {
        backward += entry(k, i) * at(t, k);
        size += std::fabs(entry(k, i) * at(t, k));
      }
      EXPECT_LE(std::fabs(backward), gamma * size) << i;
    }
  }
}

TYPED_TEST(Triangle, IsSolvedToItsBoundForEveryWidth) {
  const TypeParam* chosen = nullptr;
  for (Index columns = 1; columns <= kMost; ++columns) {
    expect_solved(block_kernels().panel(chosen), columns);
    expect_solved(reference_block_kernels().panel(chosen), columns);
  }
}

}  // namespace
}  // namespace stanchion
