#include "engine/constraints.hpp"

#include "engine/model_files.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using namespace test;

Outcome check_with_multipliers(const SymmetricMatrix& matrix, Index first_multiplier) {
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("A.mtx", matrix);
  std::string list;
  for (Index i = first_multiplier; i < matrix.rows; ++i) list += std::to_string(i + 1) + "\n";
  request.input.multipliers = files.text("multipliers.txt", list);
  return answer(run_check(request, {}));
}

TEST(Constraints, RepeatedConstraintCountsByRankNotByNumber) {
  // K = diag(-1, 1), B = [0 1; 0 1]: n-(A) = 2, rank 1, one negative direction (certificate by hand).
  const Outcome outcome =
      check_with_multipliers(from_triplets(4, {{0, 0, -1}, {1, 1, 1}, {2, 1, 1}, {3, 1, 1}}), 2);
  const ConstrainedOutcome& on = *outcome.check->constrained;
  EXPECT_EQ(on.rank, 1);
  EXPECT_EQ(on.redundant, 1);
  EXPECT_EQ(on.redundant_equations, std::vector<Index>{4});
  ASSERT_TRUE(on.inertia);
  EXPECT_EQ(on.inertia->negative, 1);
  EXPECT_EQ(on.inertia->zero, 0);
  EXPECT_EQ(on.inertia->positive, 0);
  EXPECT_EQ(on.rank_backing.level, Level::kProved);
  EXPECT_EQ(on.inertia_backing.level, Level::kProved);
}

TEST(Constraints, ARingOfTiesHasItsRankProved) {
  // Ties a-b, b-c, c-a on K = diag(1, 2, 3, -1): rank 2 (the cycle space of a triangle has dimension 1); on
  // the constraints a = b = c, so Z^T K Z = diag(6, -1).
  const Outcome outcome = check_with_multipliers(from_triplets(7, {{0, 0, 1},
                                                                   {1, 1, 2},
                                                                   {2, 2, 3},
                                                                   {3, 3, -1},
                                                                   {4, 0, 0.1},
                                                                   {4, 1, -0.1},
                                                                   {5, 1, 3},
                                                                   {5, 2, -3},
                                                                   {6, 2, 7e9},
                                                                   {6, 0, -7e9}}),
                                                 4);
  const ConstrainedOutcome& on = *outcome.check->constrained;
  EXPECT_EQ(on.rank, 2);
  EXPECT_EQ(on.redundant, 1);
  EXPECT_EQ(on.redundant_equations.size(), 1U);
  EXPECT_EQ(on.rank_backing.level, Level::kProved);
  ASSERT_TRUE(on.inertia);
  EXPECT_EQ(on.inertia->negative, 1);
  EXPECT_EQ(on.inertia->positive, 1);
  EXPECT_EQ(on.inertia->zero, 0);
}

TEST(Constraints, ARingThatMissesByOneBitIsNotCalledRedundant) {
  const double off = 3 * (1 + 0x1p-52);
  const Outcome outcome = check_with_multipliers(from_triplets(7, {{0, 0, 1},
                                                                   {1, 1, 2},
                                                                   {2, 2, 3},
                                                                   {3, 3, -1},
                                                                   {4, 0, 1},
                                                                   {4, 1, -1},
                                                                   {5, 1, 3},
                                                                   {5, 2, -3},
                                                                   {6, 2, 3},
                                                                   {6, 0, -off}}),
                                                 4);
  const ConstrainedOutcome& on = *outcome.check->constrained;
  EXPECT_TRUE(on.redundant_equations.empty());
  EXPECT_NE(on.redundant, 1);
}

TEST(Constraints, RankAndInertiaAreBackedEachOnItsOwn) {
  Certificate proved, statistical;
  proved.level = Level::kProved;
  statistical.level = Level::kStatistical;
  statistical.failure_probability = 3e-7;
  ConstraintRank rank{2, 1, 1, {Level::kStatistical, 5e-7}, {}};
  // The rank by statistics, A by proof: what follows is statistical. One zero direction is the redundant
  // constraint.
  const ConstrainedOutcome weaker = judge_on_constraints({1, 1, 6, 0}, proved, rank, {});
  EXPECT_EQ(weaker.rank_backing.level, Level::kStatistical);
  EXPECT_EQ(weaker.inertia_backing.level, Level::kStatistical);
  EXPECT_EQ(weaker.inertia_backing.failure_probability, 5e-7);
  const ConstrainedOutcome both = judge_on_constraints({1, 1, 6, 0}, statistical, rank, {});
  EXPECT_EQ(both.inertia_backing.failure_probability, 3e-7 + 5e-7);
  // A without zero directions shows the rank itself, at its own level.
  rank.least = 0, rank.most = 2;
  const ConstrainedOutcome from_a = judge_on_constraints({2, 0, 6, 0}, statistical, rank, {});
  EXPECT_EQ(from_a.rank, 2);
  EXPECT_EQ(from_a.rank_backing.failure_probability, 3e-7);
  EXPECT_EQ(from_a.inertia_backing.failure_probability, 3e-7);
  // Nothing known of the rank: a range, which rests on A alone.
  const ConstrainedOutcome range = judge_on_constraints({2, 1, 5, 0}, proved, rank, {});
  EXPECT_FALSE(range.rank);
  EXPECT_EQ(range.rank_backing.level, Level::kNone);
  EXPECT_EQ(range.inertia_backing.level, Level::kProved);
  // A not certified: the rank may still be known.
  rank.least = rank.most = 1;
  EXPECT_EQ(judge_on_constraints({0, 0, 0, 8}, {}, rank, {}).rank, 1);
}

TEST(Constraints, ConstraintsBelowTheResolutionLeaveZerosNotLessThanNothing) {
  // A decides two positive directions of five, and none negative; one constraint takes one of either sign.
  Certificate proved;
  proved.level = Level::kProved;
  const ConstraintRank rank{1, 1, 1, {Level::kProved, {}}, {}};
  const Inertia on = *judge_on_constraints({0, 3, 2, 0}, proved, rank, {}).inertia;
  EXPECT_EQ(on.negative, 0);
  EXPECT_EQ(on.zero, 2);
  EXPECT_EQ(on.positive, 1);
}

TEST(Constraints, TinyRowsAreNotTakenForMultiples) {
  // Row 2 is a third of row 1 but for less than the smallest double: no fma can show the difference.
  const double tiny = 0x3p-1070;
  const Outcome outcome = check_with_multipliers(
      from_triplets(4, {{0, 0, 1}, {1, 1, 1}, {2, 0, 3}, {2, 1, tiny}, {3, 0, 1}, {3, 1, 0x1p-1070}}), 2);
  EXPECT_TRUE(outcome.check->constrained->redundant_equations.empty());
}

TEST(Constraints, IndependentOnesNeedNoMore) {
  Random random(3);
  const Outcome outcome = check_with_multipliers(saddle(random, 120, 30), 120);
  EXPECT_EQ(outcome.check->constrained->rank, 30);
  ASSERT_TRUE(outcome.check->constrained->inertia);
  EXPECT_EQ(outcome.check->constrained->inertia->negative, 0);
  EXPECT_EQ(outcome.check->constrained->inertia->positive, 90);
}

TEST(Constraints, WhatFollowsExactlyIsRedundantWhatFollowsNearlyIsOnlyARange) {
  std::vector<Triplet> entries;
  for (Index i = 0; i < 6; ++i) entries.push_back({i, i, 1});
  entries.insert(entries.end(), {{6, 0, 1}, {6, 1, -1}, {7, 0, -2}, {7, 1, 2}});  // row 7 is -2 times row 6
  const Outcome multiple = check_with_multipliers(from_triplets(8, entries), 6);
  EXPECT_EQ(multiple.check->constrained->rank, 1);
  EXPECT_EQ(multiple.check->constrained->inertia->positive, 5);
  entries.insert(entries.end(), {{8, 1, 1}, {8, 2, -1}, {9, 0, 1}, {9, 2, -1}});  // row 9 = row 6 + row 8
  const Outcome sum = check_with_multipliers(from_triplets(10, entries), 6);
  EXPECT_EQ(sum.check->constrained->rank, 2);
  EXPECT_EQ(sum.check->constrained->inertia->positive, 4);
  // 1/3 of row 6 and 1.1 of row 8, but for the rounding of the sum in the middle.
  entries.insert(entries.end(), {{10, 0, 1.0 / 3}, {10, 1, 1.1 - 1.0 / 3}, {10, 2, -1.1}});
  const Outcome nearly = check_with_multipliers(from_triplets(11, entries), 6);
  EXPECT_FALSE(nearly.check->constrained->rank);
  ASSERT_TRUE(nearly.check->constrained->negative_range);
  EXPECT_LE(nearly.check->constrained->negative_range->first, 0);
  EXPECT_GE(nearly.check->constrained->negative_range->second, 0);
}

TEST(Constraints, WhatIsAddedToTheStructureLeavesTheRankAlone) {
  ModelFiles files;
  Request request;
  // K = diag(-1, 1, 1) and -3 added to its last dof; x2 = 0 twice: rank 1, x1 and x3 stay, both negative (by
  // hand).
  request.input.stiffness =
      files.matrix("A.mtx", from_triplets(5, {{0, 0, -1}, {1, 1, 1}, {2, 2, 1}, {3, 1, 1}, {4, 1, 1}}));
  request.input.added = {{files.matrix("soil.mtx", from_triplets(5, {{2, 2, 6}})), -0.5}};
  request.input.multipliers = files.text("multipliers.txt", "4\n5\n");
  const ConstrainedOutcome on = *answer(run_check(request, {})).check->constrained;
  EXPECT_EQ(on.rank, 1);
  ASSERT_TRUE(on.inertia);
  EXPECT_EQ(on.inertia->negative, 2);
  EXPECT_EQ(on.inertia->zero, 0);
}

TEST(Constraints, WhatIsAddedToTheConstraintsThemselvesLeavesOnlyARange) {
  ModelFiles files;
  Request request;
  // Both constraints say x2 = 0 in A; what is added makes the second x1 + x2 = 0.
  request.input.stiffness =
      files.matrix("A.mtx", from_triplets(5, {{0, 0, 1}, {1, 1, 1}, {2, 2, 1}, {3, 1, 1}, {4, 1, 1}}));
  request.input.added = {{files.matrix("more.mtx", from_triplets(5, {{4, 0, 2}})), 0.5}};
  request.input.multipliers = files.text("multipliers.txt", "4\n5\n");
  const ConstrainedOutcome regular = *answer(run_check(request, {})).check->constrained;
  EXPECT_TRUE(regular.redundant_equations.empty());
  EXPECT_EQ(regular.rank, 2) << "A without zero directions shows it";
  // Added with the other sign of what is there: the second constraint is gone, and only A could tell.
  request.input.added = {{files.matrix("less.mtx", from_triplets(5, {{4, 1, 1}})), -1}};
  const ConstrainedOutcome gone = *answer(run_check(request, {})).check->constrained;
  EXPECT_FALSE(gone.rank);
  EXPECT_EQ(gone.negative_range, (std::pair<Index, Index>{0, 0}));
  // Between multipliers: not a structure on constraints at all.
  request.input.added = {{files.matrix("between.mtx", from_triplets(5, {{4, 3, 1}})), 1}};
  const Outcome coupled = answer(run_check(request, {}));
  EXPECT_TRUE(warned(coupled, "multipliers-coupled"));
}

TEST(Constraints, MultipliersThatActOnEachOtherAreNotJudged) {
  const Outcome outcome =
      check_with_multipliers(from_triplets(3, {{0, 0, 2}, {1, 0, 1}, {2, 0, 1}, {2, 1, 1}}), 1);
  EXPECT_TRUE(warned(outcome, "multipliers-coupled"));
  EXPECT_FALSE(outcome.check->constrained->inertia);
}

}  // namespace
}  // namespace stanchion
