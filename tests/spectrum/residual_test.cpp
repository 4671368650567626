#include "spectrum/residual_intervals.hpp"

#include "spectrum/block_lanczos.hpp"
#include "spectrum/block_rows.hpp"
#include "spectrum/dense_pencil.hpp"

namespace stanchion {
namespace {

using namespace test;

/// Approximate vectors of all values: the whole space, disturbed by `noise`.
std::vector<ResidualPair> pairs_with_noise(const KnownPencil& known, PencilParts& parts, DefiniteBase& base,
                                           double noise) {
  const BlockRows rows(parts.second());
  std::vector<double> work(static_cast<std::size_t>(rows.rows()) * kBlockVectors);
  BlockLanczos lanczos(
      [&](double* block) {
        base.transposed_solve(block);
        rows.times(block, work.data(), parts.pool);
        std::copy(work.begin(), work.end(), block);
        base.solve(block);
      },
      rows.rows(), 48, 3, parts.pool);
  const std::vector<RitzValue> all = lanczos.ritz_values();
  EXPECT_EQ(all.size(), known.thetas.size());
  std::mt19937 random(5);
  std::normal_distribution<double> gauss;
  std::vector<ResidualPair> pairs;
  const ShiftedMatrix second = parts.second();
  ResidualWork residuals(base, second, false);
  for (std::size_t first = 0; first < all.size(); first += kBlockVectors) {
    const std::vector<RitzValue> chosen(
        all.begin() + static_cast<long>(first),
        all.begin() + static_cast<long>(std::min(first + kBlockVectors, all.size())));
    std::vector<double> block;
    lanczos.vectors(chosen, block);
    for (double& entry : block) entry += noise * gauss(random);
    for (ResidualPair& pair : residuals.pairs(block, static_cast<Index>(chosen.size()))) {
      pairs.push_back(std::move(pair));
    }
  }
  return pairs;
}

/// Each interval must hold at least as many exact eigenvalues as it has vectors, and all intervals together
/// all of them.
void hold(const KnownPencil& known, const std::vector<EigenvalueGroup>& groups) {
  std::size_t vectors = 0;
  for (std::size_t k = 0; k < groups.size(); ++k) {
    const auto inside = std::count_if(known.thetas.begin(), known.thetas.end(), [&](double theta) {
      return theta >= groups[k].low && theta <= groups[k].high;
    });
    EXPECT_GE(static_cast<std::size_t>(inside), groups[k].pairs.size());
    if (k > 0) {
      EXPECT_LT(groups[k - 1].high, groups[k].low);
    }
    vectors += groups[k].pairs.size();
  }
  EXPECT_EQ(vectors, known.thetas.size());
}

/// Values on a grid of 2^-12, some repeated, some a grid step apart, of both signs: exact by construction.
std::vector<double> grid_values(std::size_t n, unsigned seed) {
  std::mt19937 random(seed);
  std::vector<double> values;
  while (values.size() < n) {
    const double value = (static_cast<int>(random() % 8192) - 4096) * 0x1p-12;
    values.push_back(value);
    if (random() % 4 == 0) values.push_back(value);
    if (random() % 4 == 0) values.push_back(value + 0x1p-12);
    if (random() % 6 == 0) values.insert(values.end(), 4, value);
  }
  return values;
}

TEST(ResidualIntervals, HoldExactEigenvaluesWithMultiplicity) {
  for (unsigned seed = 1; seed <= 12; ++seed) {
    const KnownPencil known = known_pencil(grid_values(60, seed), seed);
    PencilParts parts(known);
    DefiniteBase base = parts.make_base();
    for (const double noise : {0.0, 1e-12, 1e-8, 1e-5, 1e-3, 1e-2}) {
      SCOPED_TRACE(testing::Message() << "seed " << seed << ", noise " << noise);
      hold(known, disjoint_groups(base, pairs_with_noise(known, parts, base, noise)));
    }
  }
}

TEST(ResidualIntervals, AreTightWhereVectorsAreGood) {
  const KnownPencil known = known_pencil({1, 0.5, 0.5, -0.25, 0.125, 0.0625, 2, 3}, 4);
  PencilParts parts(known);
  DefiniteBase base = parts.make_base();
  const auto groups = disjoint_groups(base, pairs_with_noise(known, parts, base, 0));
  ASSERT_EQ(groups.size(), 7u);
  for (const EigenvalueGroup& group : groups) EXPECT_LT(group.high - group.low, 1e-12);
}

TEST(ResidualIntervals, RefiningMakesThemTighter) {
  const KnownPencil known = known_pencil({4, 2, 2, 1, 0.5, 0.25, 0.125, 0.0625, 0.03125, 0.015625}, 9);
  PencilParts parts(known);
  DefiniteBase base = parts.make_base();
  std::vector<ResidualPair> rough = pairs_with_noise(known, parts, base, 1e-6);
  double before = 0, after = 0;
  for (const ResidualPair& pair : rough) before = std::max(before, pair.radius);
  const ShiftedMatrix second = parts.second();
  ResidualWork work(base, second, false);
  const auto better = work.refined_coordinates(rough);
  ASSERT_EQ(better.size(), rough.size());
  for (const auto& coordinates : better) {
    std::vector<double> block(coordinates.size() * kBlockVectors, 0.0);
    for (std::size_t i = 0; i < coordinates.size(); ++i) block[i * kBlockVectors] = coordinates[i];
    after = std::max(after, work.pairs(block, 1).front().radius);
  }
  EXPECT_LT(after, before / 100);
}

/// Once the groups are known to be all, each must still hold exactly as many values as it has vectors: of all
/// values, of those of one side, of those beyond an end that lies on no value.
TEST(SharperIntervals, HoldExactlyTheirEigenvalues) {
  std::size_t sharper = 0, grouped = 0;
  for (unsigned seed = 1; seed <= 12; ++seed) {
    const KnownPencil known = known_pencil(grid_values(60, seed), seed);
    PencilParts parts(known);
    DefiniteBase base = parts.make_base();
    for (const double noise : {0.0, 1e-9, 1e-7, 1e-6, 1e-5, 1e-4}) {
      SCOPED_TRACE(testing::Message() << "seed " << seed << ", noise " << noise);
      const auto pairs = pairs_with_noise(known, parts, base, noise);
      const auto crude = disjoint_groups(base, pairs);
      for (const double below : {-HUGE_VAL, -0.5 * 0x1p-12, 0.25 + 0.5 * 0x1p-12}) {
        std::vector<EigenvalueGroup> groups;
        bool apart = true;
        for (const EigenvalueGroup& group : crude) {
          apart = apart && (group.low > below || group.high < below);
          if (group.low > below) groups.push_back(group);
        }
        if (!apart) continue;
        const std::vector<EigenvalueGroup> before = groups;
        sharpen(base, pairs, below, HUGE_VAL, groups);
        ASSERT_EQ(groups.size(), before.size());
        for (std::size_t g = 0; g < groups.size(); ++g) {
          EXPECT_GE(groups[g].low, before[g].low);
          EXPECT_LE(groups[g].high, before[g].high);
          const auto inside = std::count_if(known.thetas.begin(), known.thetas.end(), [&](double theta) {
            return theta >= groups[g].low && theta <= groups[g].high;
          });
          EXPECT_EQ(static_cast<std::size_t>(inside), groups[g].pairs.size());
          const bool much = groups[g].high - groups[g].low < 0.05 * (before[g].high - before[g].low);
          sharper += much;
          grouped += much && groups[g].pairs.size() > 1;
        }
      }
    }
  }
  EXPECT_GT(sharper, 500u);  // else nothing was tried
  EXPECT_GT(grouped, 20u);
}

/// The width of an interval falls with the square of the noise.
TEST(SharperIntervals, FallWithTheSquareOfTheResidual) {
  const KnownPencil known = known_pencil({4, 2, 2, 1, 0.5, -0.25, -0.5, -1, -2, -2}, 9);
  PencilParts parts(known);
  DefiniteBase base = parts.make_base();
  double widest[2] = {0, 0}, crude = 0;
  for (const int k : {0, 1}) {
    const auto pairs = pairs_with_noise(known, parts, base, k == 0 ? 1e-4 : 1e-6);
    auto groups = disjoint_groups(base, pairs);
    ASSERT_EQ(groups.size(), 8u);
    for (const EigenvalueGroup& group : groups)
      if (k == 0) crude = std::max(crude, group.high - group.low);
    sharpen(base, pairs, -HUGE_VAL, HUGE_VAL, groups);
    for (const EigenvalueGroup& group : groups) widest[k] = std::max(widest[k], group.high - group.low);
  }
  EXPECT_LT(widest[0], crude / 50);
  EXPECT_LT(widest[1], widest[0] / 2000);
}

/// Where the ends leave out a value that is there, the claim is false, and so may be what follows from it:
/// the intervals do rest on the count.
TEST(SharperIntervals, RestOnTheNumberBeingRight) {
  const KnownPencil known = known_pencil({4, 1.0009765625, 1, 0.25}, 9);
  PencilParts parts(known);
  DefiniteBase base = parts.make_base();
  auto pairs = pairs_with_noise(known, parts, base, 0);
  // A vector between the two close ones, beside the largest and the smallest.
  std::vector<double> block(4 * kBlockVectors, 0.0);
  for (std::size_t i = 0; i < 4; ++i)
    block[i * kBlockVectors] = pairs[1].coordinates[i] + pairs[2].coordinates[i];
  const ShiftedMatrix second = parts.second();
  std::vector<ResidualPair> three{pairs[0], ResidualWork(base, second, false).pairs(block, 1).front(),
                                  pairs[3]};
  auto groups = disjoint_groups(base, three);
  ASSERT_EQ(groups.size(), 3u);
  sharpen(base, three, -HUGE_VAL, HUGE_VAL, groups);
  EXPECT_LT(groups[1].high, 1.0009765625);
  EXPECT_GT(groups[1].low, 1.0);
}

/// 4000 equal products whose sum rounds the same way every time, and two that cancel it but for its last
/// digits. The error of the double-double sum is 300 u^2 of its size, far above what two members could lose.
TEST(ResidualIntervals, CountTheMembersOfASum) {
  __extension__ using Wide = __int128;
  constexpr int kMembers = 4000;
  constexpr std::int64_t kFactor = 5348832172657171, kEntry = 6991685313819123;
  Wide exact = Wide{kFactor} * kEntry * kMembers;
  std::vector<double> coefficients(kMembers + 1, static_cast<double>(kFactor));
  coefficients.front() = 0;
  for (const int places : {66, 20}) {
    const auto part = static_cast<std::int64_t>(exact >> places);
    exact -= Wide{part} << places;
    coefficients.push_back(-std::ldexp(static_cast<double>(part), places));
  }
  const SymmetricMatrix one = from_triplets(1, {{0, 0, 1.0}});
  const SymmetricMatrix entry = from_triplets(1, {{0, 0, static_cast<double>(kEntry)}});
  std::vector<const SymmetricMatrix*> members(kMembers + 1, &entry);
  members.front() = &one;
  members.insert(members.end(), 2, &one);
  const KnownPencil known{from_triplets(1, {{0, 0, 1.0}}), from_triplets(1, {{0, 0, 1.0}}), {}};
  PencilParts parts(known);
  parts.family = unite(members);
  ShiftedMatrix base_matrix{&parts.family, std::vector<double>(members.size(), 0.0), &parts.scale, 0};
  base_matrix.coefficients.front() = 1;
  DefiniteBaseOptions options;
  options.smallest_eigenvalue = 1;
  auto base = DefiniteBase::make(parts.analysis, base_matrix, options, parts.pool);
  ASSERT_TRUE(base.ok() && *base);
  std::vector<double> coordinates(kBlockVectors, 0.0);
  coordinates.front() = 1;
  const ShiftedMatrix second{&parts.family, coefficients, &parts.scale, 0};
  const ResidualPair pair = ResidualWork(**base, second, false).pairs(coordinates, 1).front();
  const double size = 2.0 * kMembers * static_cast<double>(kFactor) * static_cast<double>(kEntry);
  const double error = std::fabs(pair.theta - static_cast<double>(exact));
  EXPECT_GT(error, 100 * 0x1p-106 * size);
  EXPECT_LE(error, pair.radius);
}

TEST(DefiniteBase, IsNoneForAMatrixThatIsNotDefinite) {
  const KnownPencil known = known_pencil({1, 2, 3, 4}, 2);
  PencilParts parts(known);
  ShiftedMatrix matrix{&parts.family, {-1, 0}, &parts.scale, 0};
  RiskBudget budget(1e-6);
  DefiniteBaseOptions options;
  options.risk = &budget;
  auto base = DefiniteBase::make(parts.analysis, matrix, options, parts.pool);
  ASSERT_TRUE(base.ok());
  EXPECT_FALSE(*base);
}

TEST(DefiniteBase, AProvedBoundIsUsedWhereItIsCloseEnough) {
  const KnownPencil known = known_pencil({1, 2, 3, 4, 5, 6}, 2);
  PencilParts parts(known);
  DefiniteBaseOptions options;
  options.smallest_eigenvalue = 0.2;  // T = I + N with ||N|| <= 1/2, so B = T T^T >= 1/4
  auto base = DefiniteBase::make(parts.analysis, parts.base(), options, parts.pool);
  ASSERT_TRUE(base.ok() && *base);
  EXPECT_EQ((*base)->certificate().level, Level::kProved);
  EXPECT_LT((*base)->relative(), 1e-12);
  options.smallest_eigenvalue = 0;
  auto none = DefiniteBase::make(parts.analysis, parts.base(), options, parts.pool);
  ASSERT_TRUE(none.ok());
  EXPECT_FALSE(*none);
}

/// A base without a risk to charge: by a proof of its own, or none.
Result<std::optional<DefiniteBase>> proved_base(PencilParts& parts, DefiniteBaseCost& cost) {
  DefiniteBaseOptions options;
  options.prove = true;
  options.cost = &cost;
  return DefiniteBase::make(parts.analysis, parts.base(), options, parts.pool);
}

TEST(DefiniteBase, AProofOfItsOwnNeedsAnEigenvalueWellAboveTheBackwardError) {
  const auto parts_with = [](double lowest) {
    const std::vector<Triplet> entries{{0, 0, 1.0}, {1, 1, 0.5}, {2, 2, lowest}};
    return std::make_unique<PencilParts>(
        KnownPencil{from_triplets(3, entries), from_triplets(3, entries), {}});
  };
  DefiniteBaseCost cost;
  const auto easy_parts = parts_with(0.25);
  auto easy = proved_base(*easy_parts, cost);
  ASSERT_TRUE(easy.ok() && *easy);
  EXPECT_EQ((*easy)->certificate().level, Level::kProved);
  EXPECT_EQ(cost.factorizations, 2);
  EXPECT_LT((*easy)->relative(), 0.01);
  const double error = *(*easy)->certificate().error_bound;
  // The bound may not be above the smallest eigenvalue, which is the smallest entry, wherever that lies.
  for (const double many : {300.0, 100.0, 20.0, 10.0, 3.0, 1.0}) {
    DefiniteBaseCost spent;
    const auto parts = parts_with(many * error);
    auto base = proved_base(*parts, spent);
    ASSERT_TRUE(base.ok());
    EXPECT_EQ(base->has_value(), many > 16) << many;
    EXPECT_EQ(spent.factorizations, many > 256 ? 2 : 3);
    if (*base) {
      EXPECT_LE(*(*base)->certificate().smallest_eigenvalue_above, many * error);
    }
  }
}

}  // namespace
}  // namespace stanchion
