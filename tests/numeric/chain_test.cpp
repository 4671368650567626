// A hand-made tree of two thousand fronts with one pivot each: what is lost in the border's running diagonal.
#include <gtest/gtest.h>

#include <cmath>

#include "support/factored.hpp"

namespace stanchion {
namespace {

/// An arrow matrix, unit diagonal, `coupling` along the border, whose fronts form a chain instead of a star.
test::Prepared arrow_chain(Index links, double coupling, double border, int threads) {
  std::vector<Triplet> entries;
  for (Index i = 0; i < links; ++i) {
    entries.push_back({i, i, 1});
    entries.push_back({links, i, coupling});
  }
  entries.push_back({links, links, border});
  const SymmetricMatrix matrix = from_triplets(links + 1, entries);
  test::Prepared prepared;
  AssemblyTree& tree = prepared.analysis.tree;
  const Index rows = links + 1;
  tree.rows = tree.fronts = rows;
  tree.components = 1;
  tree.position_of = Buffer<Index>(rows);
  tree.first_column = Buffer<Index>(Offset{rows} + 1);
  tree.row_start = Buffer<Offset>(Offset{rows} + 1);
  tree.rows_below = Buffer<Index>(links, links);
  tree.parent = Buffer<Index>(rows);
  tree.component = Buffer<Index>(rows, 0);
  for (Index f = 0; f <= rows; ++f) {
    tree.first_column[f] = f;
    tree.row_start[f] = std::min(f, links);
    if (f == rows) break;
    tree.position_of[f] = f;
    tree.parent[f] = f < links ? f + 1 : -1;
  }
  tree.equation_at = tree.position_of.clone();
  prepared.analysis.schedule = make_schedule(tree, threads);
  const std::array<const SymmetricMatrix*, 1> members{&matrix};
  prepared.family = permute(unite(members), tree.position_of);
  prepared.scale = Buffer<double>(rows, 1.0);
  prepared.pool = std::make_unique<ThreadPool>(threads);
  return prepared;
}

/// |exact last pivot - computed one|: the only entry in which L D L^T differs.
double border_error(Index links, double coupling, double border, const Factorization& f) {
  long double exact = border;
  for (Index i = 0; i < links; ++i) exact -= static_cast<long double>(coupling) * coupling;
  return static_cast<double>(
      std::fabs(exact - static_cast<long double>(f.factor->fronts.back().diagonal[0])));
}

TEST(Chain, TheBoundCoversWhatTheRunningDiagonalLoses) {
  constexpr Index kLinks = 2000;
  constexpr double kUnit = 0x1p-53,
                   kCoupling = 0x1.6p-27;  // every update is under half a unit of 1.5: all are lost
  FactorOptions options;
  options.keep_factor = true;
  const Factorization f = arrow_chain(kLinks, kCoupling, 1.5, 1).factor(0, options);
  const double error = border_error(kLinks, kCoupling, 1.5, f);
  EXPECT_LE(error, f.error_bound);
  // Without gamma |S| only |L||D||L^T| would be left: 2,000 times coupling^2 times a gamma of about 50 u.
  EXPECT_GT(error, 40 * kLinks * kCoupling * kCoupling * 50 * kUnit);
  EXPECT_LE(f.error_bound, 200 * error) << "and it is not far above";
}

TEST(Chain, TheBoundHoldsForLargerCouplings) {
  FactorOptions options;
  options.keep_factor = true;
  for (const double coupling : {1e-5, 1e-3, 0.1, 0.7}) {
    const Factorization f = arrow_chain(2000, coupling, 1.0 / 3, 1).factor(0, options);
    EXPECT_LE(border_error(2000, coupling, 1.0 / 3, f), f.error_bound) << coupling;
    EXPECT_EQ(f.signs.negative, 2000 * coupling * coupling > 1.0 / 3 ? 1 : 0);
  }
}

}  // namespace
}  // namespace stanchion
