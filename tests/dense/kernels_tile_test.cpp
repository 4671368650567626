// The kernels that factor one tile: every instruction set against the mathematics and against the reference
// set.
#include <gtest/gtest.h>

#include <cmath>
#include <limits>

#include "dense/kernels.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::Random;

using Scalars = ::testing::Types<double, float>;
template <class Scalar>
class KernelSets : public ::testing::Test {};
TYPED_TEST_SUITE(KernelSets, Scalars);
template <class Scalar>
class FactorTile : public ::testing::Test {};
TYPED_TEST_SUITE(FactorTile, Scalars);
template <class Scalar>
class FactorTilePivoted : public ::testing::Test {};
TYPED_TEST_SUITE(FactorTilePivoted, Scalars);
template <class Scalar>
class InvertUnitLower : public ::testing::Test {};
TYPED_TEST_SUITE(InvertUnitLower, Scalars);

constexpr double kGuard = 12345.25;  // fills what a kernel must leave alone

/// A tile of `width` columns inside a taller array, with room for its pivots.
template <class Scalar>
struct Tile {
  static constexpr double kUnit = Rounding<Scalar>::kUnit;
  Index width, leading;
  std::vector<Scalar> value, original;
  std::vector<double> diagonal, off_diagonal;
  std::vector<PivotKind> kind;
  std::vector<Index> permutation;

  Tile(Random& random, Index width_in, Index leading_in, double diagonal_shift)
      : width(width_in),
        leading(leading_in),
        value(static_cast<std::size_t>(width_in) * static_cast<std::size_t>(leading_in), kGuard) {
    const auto w = static_cast<std::size_t>(width);
    diagonal.resize(w), off_diagonal.resize(w), kind.resize(w), permutation.resize(w);
    for (Index j = 0; j < width; ++j) {
      for (Index i = j; i < width; ++i)
        at(i, j) = static_cast<Scalar>(test::uniform(random, -1, 1) + (i == j ? diagonal_shift : 0));
    }
    original = value;
  }
  Scalar& at(Index i, Index j) { return value[static_cast<std::size_t>(j * leading + i)]; }
  Scalar before(Index i, Index j) const {
    return original[static_cast<std::size_t>(std::min(i, j) * leading + std::max(i, j))];
  }
  PivotArrays pivots() { return {diagonal.data(), off_diagonal.data(), kind.data()}; }

  /// Fails where P A P^T - L D L^T is above the bound, or the undivided multipliers do not belong to L and D.
  void expect_factored(Index found, bool permuted) {
    for (Index i = 0; i < width; ++i) {
      for (Index j = 0; j <= i; ++j) {
        if (i >= found && j >= found) continue;
        long double sum = 0, size = 0;
        for (Index k = 0; k < std::min(found, j + 1); ++k) {
          const long double l = j == k ? 1 : at(j, k),
                            w = i == k ? diagonal[static_cast<std::size_t>(k)] : at(k, i);
          // w_ki = (D L^T)_ki for i > k; the diagonal of a 2x2 pivot is made of d and its partner's
          // off-diagonal.
          sum += l * w;
          size += std::fabs(l * w);
        }
        const Index pi = permuted ? permutation[static_cast<std::size_t>(i)] : i,
                    pj = permuted ? permutation[static_cast<std::size_t>(j)] : j;
        const auto error = static_cast<double>(std::fabs(sum - static_cast<long double>(before(pi, pj))));
        ASSERT_LE(error, static_cast<double>(width + 2) * kUnit * static_cast<double>(size) + 1e-300)
            << "entry " << i << ", " << j << " of " << width;
      }
    }
    for (Index k = 0; k < found; ++k) {
      const auto kk = static_cast<std::size_t>(k);
      if (kind[kk] == PivotKind::kTwoSecond) continue;
      for (Index i = k + (kind[kk] == PivotKind::kOne ? 1 : 2); i < width; ++i) {
        if (kind[kk] == PivotKind::kOne) {
          ASSERT_NEAR(at(i, k) * diagonal[kk], at(k, i), 4 * kUnit * std::fabs(at(k, i)));
          continue;
        }
        const double b = off_diagonal[kk], x = at(i, k), y = at(i, k + 1);
        const double size = std::fabs(b) * (std::fabs(x) + std::fabs(y));
        ASSERT_NEAR(diagonal[kk] * x + b * y, at(k, i), 24 * kUnit * size);
        ASSERT_NEAR(b * x + diagonal[kk + 1] * y, at(k + 1, i), 24 * kUnit * size);
      }
    }
  }

  void expect_guards_untouched() {
    for (Index j = 0; j < width; ++j) {
      for (Index i = width; i < leading; ++i) ASSERT_EQ(at(i, j), kGuard);
    }
  }
};

template <class Scalar, class Check>
void for_every_set(const Check& check) {
  const KernelSet<Scalar>* sets[3];
  const int count = kernel_sets(sets);
  EXPECT_EQ(sets[0], &reference_kernels_of<Scalar>());
  for (int s = 0; s < count; ++s) {
    SCOPED_TRACE(sets[s]->isa);
    check(*sets[s]);
  }
}

TYPED_TEST(KernelSets, TheChosenOneIsAmongThoseThatRun) {
  using Scalar = TypeParam;
  const KernelSet<Scalar>* sets[3];
  const int count = kernel_sets(sets);
  ASSERT_GE(count, 1);
  EXPECT_EQ(&kernels_of<Scalar>(), sets[count - 1]) << "the last is the widest";
}

TYPED_TEST(FactorTile, EverySizeMultipliesOut) {
  using Scalar = TypeParam;
  for_every_set<Scalar>([](const KernelSet<Scalar>& set) {
    Random random(111);
    for (Index width = 1; width <= kTileWidth; ++width) {
      for (const Index leading : {width, width + 1, Index{67}}) {
        for (const bool definite : {false, true}) {
          Tile<Scalar> tile(random, width, std::max(leading, width), 1.0 * width + 1);
          ASSERT_EQ(set.factor_tile(tile.value.data(), tile.leading, width, definite, 100, tile.pivots()),
                    width);
          tile.expect_factored(width, false);
          tile.expect_guards_untouched();
        }
      }
    }
  });
}

TYPED_TEST(FactorTile, StopsBeforeTheFirstBadPivot) {
  using Scalar = TypeParam;
  constexpr Scalar kInfinity = std::numeric_limits<Scalar>::infinity();
  constexpr Scalar kNan = std::numeric_limits<Scalar>::quiet_NaN();
  constexpr double kLeast = Rounding<Scalar>::kLeastPivot;
  constexpr auto kTooSmall = static_cast<Scalar>(kLeast / 2);
  for_every_set<Scalar>([&](const KernelSet<Scalar>& set) {
    Random random(112);
    for (const Index bad : {0, 1, 8, 30}) {
      for (const Scalar pivot :
           {Scalar{0}, kTooSmall, -kTooSmall, kInfinity, -kInfinity, kNan, Scalar{-5}, Scalar{1e-6}}) {
        for (const bool definite : {false, true}) {
          Tile<Scalar> tile(random, 31, 33, 40);
          for (Index j = 0; j < bad; ++j) tile.at(bad, j) = 0;
          tile.at(bad, bad) = pivot;
          tile.original = tile.value;
          const bool takes = definite ? pivot >= kLeast && pivot < kInfinity
                                      : pivot == -5.0 || (pivot == Scalar{1e-6} && bad == 30);
          const Index found = set.factor_tile(tile.value.data(), 33, 31, definite, 100, tile.pivots());
          if (takes) {
            EXPECT_GT(found, bad) << "pivot " << pivot << " definite " << definite;
          } else {
            EXPECT_EQ(found, bad) << "pivot " << pivot << " definite " << definite;
          }
        }
      }
    }
  });
}

TYPED_TEST(FactorTile, ANanBelowAPivotIsNotAcceptedWhenPivoting) {
  using Scalar = TypeParam;
  for_every_set<Scalar>([](const KernelSet<Scalar>& set) {
    Random random(113);
    for (Index row = 1; row < 40; ++row) {
      Tile<Scalar> tile(random, 40, 40, 50);
      tile.at(row, 0) = std::numeric_limits<Scalar>::quiet_NaN();
      EXPECT_EQ(set.factor_tile(tile.value.data(), 40, 40, false, 100, tile.pivots()), 0);
    }
  });
}

TYPED_TEST(FactorTilePivoted, EverySizeMultipliesOutWithSmallMultipliers) {
  using Scalar = TypeParam;
  for_every_set<Scalar>([](const KernelSet<Scalar>& set) {
    Random random(114);
    for (Index width = 1; width <= kTileWidth; ++width) {
      for (const double shift : {0.0, 1.0}) {
        for (const bool zero_diagonal : {false, true}) {
          Tile<Scalar> tile(random, width, width + width % 5, shift);
          for (Index i = 0; zero_diagonal && i < width; ++i) tile.at(i, i) = 0;
          tile.original = tile.value;
          const Index found = set.factor_tile_pivoted(tile.value.data(), tile.leading, width, tile.pivots(),
                                                      tile.permutation.data());
          ASSERT_EQ(found, zero_diagonal && width == 1 ? 0 : width);
          std::vector<char> seen(static_cast<std::size_t>(width), 0);
          for (const Index from : tile.permutation) ++seen[static_cast<std::size_t>(from)];
          ASSERT_EQ(std::count(seen.begin(), seen.end(), 1), width);
          for (Index k = 0; k < found; ++k) {
            for (Index i = k + 1; i < width; ++i) ASSERT_LE(std::fabs(tile.at(i, k)), 2.79);
          }
          tile.expect_factored(found, true);
          tile.expect_guards_untouched();
        }
      }
    }
  });
}

TYPED_TEST(FactorTilePivoted, StopsWhereOnlyZerosOrPoisonAreLeft) {
  using Scalar = TypeParam;
  for_every_set<Scalar>([](const KernelSet<Scalar>& set) {
    Random random(115);
    for (const Index rank : {0, 1, 5, 20}) {
      Tile<Scalar> tile(random, 24, 25, 0);
      for (Index j = 0; j < 24; ++j) {
        for (Index i = j; i < 24; ++i)
          tile.at(i, j) = i == j && i % 24 < rank ? Scalar{3} + static_cast<Scalar>(i) : Scalar{0};
      }
      EXPECT_EQ(set.factor_tile_pivoted(tile.value.data(), 25, 24, tile.pivots(), tile.permutation.data()),
                rank);
    }
    for (const Scalar bad :
         {std::numeric_limits<Scalar>::infinity(), std::numeric_limits<Scalar>::quiet_NaN()}) {
      for (const Index row : {0, 7, 23}) {
        Tile<Scalar> tile(random, 24, 24, 30);
        tile.at(row, 0) = bad;
        EXPECT_EQ(set.factor_tile_pivoted(tile.value.data(), 24, 24, tile.pivots(), tile.permutation.data()),
                  0);
      }
    }
  });
}

TYPED_TEST(InvertUnitLower, EverySizeIsAnInverse) {
  using Scalar = TypeParam;
  for_every_set<Scalar>([](const KernelSet<Scalar>& set) {
    Random random(116);
    for (Index width = 1; width <= kTileWidth; ++width) {
      const Index leading = width + 3, leading_inverse = width + 1;
      std::vector<Scalar> lower(static_cast<std::size_t>(leading * width)),
          inverse(static_cast<std::size_t>(leading_inverse * width), kGuard);
      for (Scalar& v : lower) v = static_cast<Scalar>(test::uniform(random, -1, 1));
      for (Index j = 0; j < width; ++j)
        lower[static_cast<std::size_t>(j * leading + j)] = kGuard;  // not to be read
      set.invert_unit_lower(lower.data(), leading, width, inverse.data(), leading_inverse);
      for (Index c = 0; c < width; ++c) {
        ASSERT_EQ(inverse[static_cast<std::size_t>(c * leading_inverse + width)], kGuard);
        for (Index i = 0; i < width; ++i) {
          long double sum = 0, size = 0;
          for (Index k = 0; k <= i; ++k) {
            const long double term =
                (k == i ? 1.0L : static_cast<long double>(lower[static_cast<std::size_t>(k * leading + i)])) *
                inverse[static_cast<std::size_t>(c * leading_inverse + k)];
            sum += term;
            size += std::fabs(term);
          }
          if (i < c) {
            ASSERT_EQ(inverse[static_cast<std::size_t>(c * leading_inverse + i)], 0);
          }
          ASSERT_LE(static_cast<double>(std::fabs(sum - (i == c ? 1 : 0))),
                    width * Rounding<Scalar>::kUnit * static_cast<double>(size));
        }
      }
    }
  });
}

}  // namespace
}  // namespace stanchion
