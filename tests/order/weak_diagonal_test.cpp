#include "order/weak_diagonal.hpp"

#include <gtest/gtest.h>

#include <array>

#include "support/factored.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

/// Diagonals 1 .. 20 and the identity.
MatrixFamily diagonals() {
  std::vector<Triplet> first, second;
  for (Index i = 0; i < 20; ++i) {
    first.push_back({i, i, i + 1.0});
    second.push_back({i, i, 1});
  }
  const SymmetricMatrix a = from_triplets(20, first), b = from_triplets(20, second);
  const std::array<const SymmetricMatrix*, 2> members{&a, &b};
  return unite(members);
}

TEST(WeakDiagonals, AreThoseThatTheShiftTakesAway) {
  const MatrixFamily family = diagonals();
  const std::vector<double> ones{1, 0};
  EXPECT_TRUE(weak_diagonals(family, ones).empty());
  // One row of twenty is not worth another order.
  EXPECT_TRUE(weak_diagonals(family, std::vector<double>{1, -7}).empty());
  // 100 and 101 are within a hundredth of each other, 100 and 103 are not.
  std::vector<Triplet> first, second;
  for (Index i = 0; i < 4; ++i) {
    first.push_back({i, i, i < 2 ? 101.0 : 103.0});
    second.push_back({i, i, 1});
  }
  const SymmetricMatrix a = from_triplets(4, first), b = from_triplets(4, second);
  const std::array<const SymmetricMatrix*, 2> members{&a, &b};
  EXPECT_EQ(weak_diagonals(unite(members), std::vector<double>{1, -100}), (std::vector<char>{1, 1, 0, 0}));
}

/// The case in which every pivot has to be a pair: without pairs most columns are delayed.
TEST(WeakDiagonals, PairsSpareMostDelays) {
  const SymmetricMatrix matrix = test::laplacian(14, 14, 14);
  const auto delayed = [&](bool paired) {
    test::Prepared prepared;
    prepared.pool = std::make_unique<ThreadPool>(1);
    std::vector<Triplet> unit;
    for (Index i = 0; i < matrix.rows; ++i) unit.push_back({i, i, 1});
    const SymmetricMatrix identity = from_triplets(matrix.rows, unit);
    const std::array<const SymmetricMatrix*, 2> members{&matrix, &identity};
    MatrixFamily family = unite(members);
    const std::vector<double> coefficients{1, -matrix.value[0]};
    const std::vector<char> weak = weak_diagonals(family, coefficients);
    EXPECT_EQ(weak.size(), static_cast<std::size_t>(matrix.rows));
    OrderingInput input{&matrix, {}, true};
    if (paired) input.weak_diagonal = weak;
    auto analysis = analyse(input, 1);
    EXPECT_TRUE(analysis.ok());
    prepared.analysis = std::move(*analysis);
    prepared.family = permute(family, prepared.analysis.tree.position_of);
    prepared.scale = Buffer<double>(matrix.rows, 1.0);
    const ShiftedMatrix shifted{&prepared.family, coefficients, &prepared.scale, 0};
    auto factored = factorize(prepared.analysis, shifted, {}, *prepared.pool);
    EXPECT_TRUE(factored.ok());
    // The grid has two colours of 1372 cells, so that as many eigenvalues are negative as are positive; some
    // vanish (sums of three cosines), and rounding gives them either sign.
    EXPECT_EQ(factored->signs.negative + factored->signs.zero + factored->signs.positive, matrix.rows);
    return factored->delayed_pivots;
  };
  EXPECT_LT(5 * delayed(true), delayed(false));
}

}  // namespace
}  // namespace stanchion
