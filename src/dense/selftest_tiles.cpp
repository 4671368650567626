// Tiles factored by our own loops for one instruction set: L D L^T must give the tile back.
#include <algorithm>
#include <cmath>

#include "dense/selftest_parts.hpp"

namespace stanchion::selftests {
namespace {

std::size_t place(Index i, Index j) {
  return static_cast<std::size_t>(i + Offset{j} * kTileWidth);
}

template <class Scalar>
struct Tile {
  Index width;
  std::vector<Scalar> original, factored;
  std::vector<double> diagonal, off_diagonal;
  std::vector<PivotKind> kind;
  std::vector<Index> permutation;

  Tile(Numbers& numbers, Index width_in, double dominance)
      : width(width_in),
        original(std::size_t{kTileWidth} * kTileWidth, Scalar{0}),
        diagonal(static_cast<std::size_t>(width)),
        off_diagonal(diagonal),
        kind(diagonal.size()),
        permutation(diagonal.size()) {
    for (Index j = 0; j < width; ++j) {
      permutation[static_cast<std::size_t>(j)] = j;
      for (Index i = j; i < width; ++i) {
        original[place(i, j)] = original[place(j, i)] =
            static_cast<Scalar>(numbers.uniform() + (i == j ? dominance : 0));
      }
    }
    factored = original;
  }
  PivotArrays pivots() { return {diagonal.data(), off_diagonal.data(), kind.data()}; }
  double lower(Index i, Index k) const { return i == k ? 1 : (i < k ? 0 : factored[place(i, k)]); }

  /// Largest |A - L D L^T| over the sizes of the terms, in units of roundoff.
  double error() const {
    double largest = 0;
    for (Index j = 0; j < width; ++j) {
      for (Index i = j; i < width; ++i) {
        const Index row = permutation[static_cast<std::size_t>(i)],
                    column = permutation[static_cast<std::size_t>(j)];
        double left = original[place(row, column)], size = std::fabs(left);
        for (Index k = 0; k <= j; ++k) {
          const auto kk = static_cast<std::size_t>(k);
          double w = lower(i, k) * diagonal[kk];
          if (kind[kk] == PivotKind::kTwoFirst) w += lower(i, k + 1) * off_diagonal[kk];
          if (kind[kk] == PivotKind::kTwoSecond) w += lower(i, k - 1) * off_diagonal[kk - 1];
          left -= w * lower(j, k);
          size += std::fabs(w * lower(j, k));
        }
        largest = std::max(largest, std::fabs(left) / size);
      }
    }
    return largest / Rounding<Scalar>::kUnit;
  }
};

}  // namespace

template <class Scalar>
std::string factored_tiles(const KernelSet<Scalar>& set) {
  Numbers numbers(5);
  constexpr double kMostUnits = 3 * kTileWidth;  // the factors' and the check's own roundings
  for (const Index width : {1, 2, 3, 5, 8, 13, 16, 27, 32, 48, 63, 64}) {
    Tile<Scalar> definite(numbers, width, width);
    const Index found =
        set.factor_tile(definite.factored.data(), kTileWidth, width, true, 100, definite.pivots());
    if (found != width || !(definite.error() <= kMostUnits)) {
      return "a definite tile of " + std::to_string(width) + " columns is wrong with " + set.isa;
    }
    Tile<Scalar> indefinite(numbers, width, 0);
    const Index pivoted = set.factor_tile_pivoted(indefinite.factored.data(), kTileWidth, width,
                                                  indefinite.pivots(), indefinite.permutation.data());
    if (pivoted != width || !(indefinite.error() <= kMostUnits)) {
      return "an indefinite tile of " + std::to_string(width) + " columns is wrong with " + set.isa;
    }
  }
  return {};
}

template std::string factored_tiles(const KernelSet<double>&);
template std::string factored_tiles(const KernelSet<float>&);

}  // namespace stanchion::selftests
