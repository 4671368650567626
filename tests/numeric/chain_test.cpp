// A hand-made tree of two thousand fronts with one pivot each: what is lost in the border's running diagonal.
#include <gtest/gtest.h>

#include <cmath>

#include "support/factored.hpp"

namespace stanchion {
namespace {

/// Couples the first link so strongly that the border's running diagonal starts at -25/16; exact.
constexpr double kFirst = 1.25;

/// An arrow matrix, unit diagonal, `coupling` along the border, whose fronts form a chain instead of a star.
test::Prepared arrow_chain(Index links, double coupling, double border, int threads) {
  std::vector<Triplet> entries;
  for (Index i = 0; i < links; ++i) {
    entries.push_back({i, i, 1});
    entries.push_back({links, i, i == 0 ? kFirst : coupling});
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
  link_children(tree);
  prepared.analysis.schedule = make_schedule(tree, threads);
  const std::array<const SymmetricMatrix*, 1> members{&matrix};
  prepared.family = permute(unite(members), tree.position_of);
  prepared.scale = Buffer<double>(rows, 1.0);
  prepared.pool = std::make_unique<ThreadPool>(threads);
  return prepared;
}

/// |exact last pivot - computed one|: the only entry in which L D L^T differs.
double border_error(Index links, double coupling, double border, const Factorization& f) {
  long double exact = border - kFirst * kFirst;
  for (Index i = 1; i < links; ++i) exact -= static_cast<long double>(coupling) * coupling;
  return static_cast<double>(
      std::fabs(exact - static_cast<long double>(f.factor->fronts.back().diagonal[0])));
}

TEST(Chain, TheBoundCoversWhatTheRunningDiagonalLoses) {
  constexpr Index kLinks = 2000;
  constexpr double kUnit = 0x1p-53,
                   kCoupling = 0x1.6p-27;  // every update is under half a unit of 25/16: all are lost
  FactorOptions options;
  options.keep_factor = true;
  const Factorization f = arrow_chain(kLinks, kCoupling, 4, 1).factor(0, options);
  const double error = border_error(kLinks, kCoupling, 4, f);
  EXPECT_LE(error, f.error_bound);
  // gamma |L||D||L^T| alone: a gamma of about 50 u times the row of the first front; the others add next to
  // nothing.
  const double growth_alone = 50 * kUnit * kFirst * (1 + kFirst);
  EXPECT_GT(error, 10 * growth_alone)
      << "this chain is to show that |S| and the assembly may not be left out";
  EXPECT_LE(f.error_bound, 100 * error) << "and it is not far above";
}

TEST(Chain, TheBoundHoldsForLargerCouplings) {
  FactorOptions options;
  options.keep_factor = true;
  for (const double coupling : {1e-5, 1e-3, 0.1, 0.7}) {
    const Factorization f = arrow_chain(2000, coupling, 2, 1).factor(0, options);
    EXPECT_LE(border_error(2000, coupling, 2, f), f.error_bound) << coupling;
    EXPECT_EQ(f.signs.negative, 1999 * coupling * coupling > 2 - kFirst * kFirst ? 1 : 0);
  }
}

}  // namespace
}  // namespace stanchion
