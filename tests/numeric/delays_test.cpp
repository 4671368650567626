// Pivots that are refused in their own front and travel up the tree, on one thread and on several.
#include <gtest/gtest.h>

#include <cmath>

#include "support/factored.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::laplacian;
using test::prepare;

void expect_same(const Factorization& a, const Factorization& b) {
  EXPECT_EQ(a.signs.negative, b.signs.negative);
  EXPECT_EQ(a.signs.zero, b.signs.zero);
  EXPECT_EQ(a.signs.positive, b.signs.positive);
  EXPECT_EQ(a.error_bound, b.error_bound);  // to the last bit
  EXPECT_EQ(a.delayed_pivots, b.delayed_pivots);
  EXPECT_EQ(a.two_by_two_pivots, b.two_by_two_pivots);
}

/// Every number that the kept factors hold.
void expect_same_factor(const Factor& a, const Factor& b) {
  ASSERT_EQ(a.fronts.size(), b.fronts.size());
  for (std::size_t f = 0; f < a.fronts.size(); ++f) {
    const FactorFront &left = a.fronts[f], &right = b.fronts[f];
    ASSERT_EQ(left.pivots, right.pivots);
    ASSERT_EQ(left.order, right.order);
    ASSERT_TRUE(std::equal(left.lower.begin(), left.lower.end(), right.lower.begin())) << "front " << f;
    ASSERT_TRUE(std::equal(left.diagonal.begin(), left.diagonal.end(), right.diagonal.begin()));
    ASSERT_TRUE(std::equal(left.position.begin(), left.position.end(), right.position.begin()));
  }
}

TEST(Delays, AllZeroDiagonalBoxMatchesTheClosedForm) {
  // Shifted by its diagonal, the box has no 1x1 pivot to begin with and no partner to join.
  const SymmetricMatrix matrix = laplacian(15, 16, 17, 6);
  Offset below = 0;
  for (const double v : test::laplacian_spectrum(15, 16, 17)) {
    ASSERT_GT(std::fabs(v - 6), 1e-9);
    below += v < 6;
  }
  const Factorization f = prepare(matrix).factor(0);
  EXPECT_EQ(f.signs.negative, below);
  EXPECT_EQ(f.signs.positive, 15 * 16 * 17 - below);
  EXPECT_EQ(f.signs.zero, 0);
  EXPECT_GT(f.delayed_pivots, 0);
  EXPECT_GT(f.two_by_two_pivots, 100);
  FactorOptions keep;
  keep.keep_factor = true;
  expect_same(f, prepare(matrix).factor(0, keep));
}

/// A chain of fronts in which a column can be eliminated nowhere but at the root: 0 on the diagonal, coupled
/// to the last equation only.
TEST(Delays, TravelUpManyLevels) {
  constexpr Index kLinks = 400;
  std::vector<Triplet> entries;
  // Links i and i + 1 are coupled; the orphan is coupled to link 0 and, overwhelmingly, to the last one.
  for (Index i = 0; i < kLinks; ++i) {
    entries.push_back({i, i, 4});
    if (i > 0) entries.push_back({i, i - 1, -1});
  }
  AssemblyTree tree;
  const Index orphan = kLinks, last = kLinks + 1, rows = kLinks + 2;
  entries.push_back({orphan, orphan, 0});
  entries.push_back({last, orphan, 1});
  entries.push_back({last, last, 1});
  entries.push_back({last, kLinks - 1, -1});
  const SymmetricMatrix matrix = from_triplets(rows, entries);
  // The orphan is eliminated first (front 0), then the links one by one; every front also holds the last
  // equation.
  tree.rows = rows;
  tree.fronts = kLinks + 2;
  tree.components = 1;
  tree.position_of = Buffer<Index>(rows);
  tree.equation_at = Buffer<Index>(rows);
  tree.first_column = Buffer<Index>(Offset{rows} + 1);
  tree.row_start = Buffer<Offset>(Offset{rows} + 1);
  tree.parent = Buffer<Index>(rows);
  tree.component = Buffer<Index>(rows, 0);
  std::vector<Index> below;
  for (Index f = 0; f < rows; ++f) {
    const Index equation = f == 0 ? orphan : (f <= kLinks ? f - 1 : last);
    tree.position_of[equation] = f;
    tree.equation_at[f] = equation;
    tree.first_column[f] = f;
    tree.parent[f] = f + 1 < rows ? f + 1 : -1;
    tree.row_start[f] = static_cast<Offset>(below.size());
    if (f > 0 && f + 2 < rows) below.push_back(f + 1);
    if (f + 1 < rows) below.push_back(rows - 1);
  }
  tree.first_column[rows] = rows;
  tree.row_start[rows] = static_cast<Offset>(below.size());
  tree.rows_below = Buffer<Index>(static_cast<Offset>(below.size()));
  std::copy(below.begin(), below.end(), tree.rows_below.begin());
  link_children(tree);

  test::Prepared prepared;
  prepared.pool = std::make_unique<ThreadPool>(1);
  prepared.analysis.tree = std::move(tree);
  prepared.analysis.schedule = make_schedule(prepared.analysis.tree, 1);
  const std::array<const SymmetricMatrix*, 1> members{&matrix};
  prepared.family = permute(unite(members), prepared.analysis.tree.position_of);
  prepared.scale = Buffer<double>(rows, 1.0);
  for (const bool keep : {false, true}) {
    FactorOptions options;
    options.keep_factor = keep;
    const Factorization f = prepared.factor(0, options);
    EXPECT_EQ(f.delayed_pivots, kLinks + 1) << "refused in its own front and in every one on the way";
    EXPECT_EQ(f.signs.negative, 1);
    EXPECT_EQ(f.signs.positive, rows - 1);
    EXPECT_EQ(f.signs.zero, 0);
  }
}

TEST(Delays, SameBitsForOneToFourThreads) {
  const SymmetricMatrix matrix = laplacian(25, 24, 23, 6);
  FactorOptions keep;
  keep.keep_factor = true;
  const Factorization one = prepare(matrix, 1).factor(0, keep);
  EXPECT_GT(one.delayed_pivots, 0);
  for (const int threads : {2, 3, 4}) {
    const auto prepared = prepare(matrix, threads);
    EXPECT_FALSE(prepared.analysis.schedule.shared_fronts.empty());
    const Factorization many = prepared.factor(0, keep);
    expect_same(one, many);
    expect_same_factor(*one.factor, *many.factor);
    expect_same(one, prepared.factor(0));
  }
}

TEST(Delays, SameBitsOnRandomMatricesWithManyZeroDiagonals) {
  test::Random random(161);
  const SymmetricMatrix matrix = test::random_sparse(random, 2500, 4, 0.7, 0);
  const Factorization one = prepare(matrix, 1).factor(0);
  EXPECT_GT(one.delayed_pivots, 0);
  for (const int threads : {2, 3, 4}) expect_same(one, prepare(matrix, threads).factor(0));
}

}  // namespace
}  // namespace stanchion
