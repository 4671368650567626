// Fronts of several column blocks: the bound, the team's bits and the two modes.
#include <gtest/gtest.h>

#include "dense/front_makers.hpp"

namespace stanchion {
namespace {

using test::FrontCase;
using test::Random;

struct Shape {
  Index order, candidates;
};

TEST(EliminateLarge, TheBoundHoldsAcrossColumnBlocks) {
  Random random(71);
  double used = 0;
  for (const auto& [order, candidates] : {Shape{300, 300}, {420, 310}, {700, 550}}) {
    std::vector<test::NamedFront> fronts;
    fronts.push_back({"indefinite", test::random_symmetric(random, order)});
    fronts.push_back({"arrow", test::arrow(random, order)});
    fronts.push_back({"hopeless candidates", test::weak_candidates(random, order, candidates, 1e-12)});
    for (auto& [name, matrix] : fronts) {
      SCOPED_TRACE(std::string(name) + ", order " + std::to_string(order));
      FrontCase front(std::move(matrix), candidates);
      front.run({false, 0.01, true});
      used = std::max(used, front.expect_bound_holds());
      EXPECT_LE(front.largest_multiplier(), 100 * (1 + 1e-12));
    }
  }
  RecordProperty("share_of_bound_used", std::to_string(used));
}

TEST(EliminateLarge, AnyTeamGivesTheSameBits) {
  Random random(72);
  ThreadPool two(2), three(3);
  for (const auto& [order, candidates] : {Shape{90, 70}, {300, 300}, {640, 400}}) {
    for (auto& [name, matrix] : test::hard_fronts(random, order, candidates)) {
      SCOPED_TRACE(std::string(name) + ", order " + std::to_string(order));
      FrontCase alone(matrix, candidates), pair(matrix, candidates), trio(matrix, candidates);
      alone.run({});
      pair.run({}, &two);
      trio.run({}, &three);
      test::expect_same_outcome(alone, pair);
      test::expect_same_outcome(alone, trio);
    }
  }
}

TEST(EliminateLarge, KeepingTheFactorChangesNoPivot) {
  Random random(73);
  for (const auto& [order, candidates] : {Shape{20, 11}, {90, 70}, {300, 300}, {560, 400}}) {
    for (auto& [name, matrix] : test::hard_fronts(random, order, candidates)) {
      SCOPED_TRACE(std::string(name) + ", order " + std::to_string(order));
      FrontCase dropped(matrix, candidates), kept(matrix, candidates);
      dropped.run({false, 0.01, false});
      kept.run({false, 0.01, true});
      test::expect_same_outcome(dropped, kept);
    }
  }
}

TEST(EliminateLarge, ScratchIsReusedFromFrontToFront) {
  Random random(74);
  EliminationScratch scratch;
  for (const Index order : {400, 30, 520, 8, 300}) {
    FrontCase fresh(test::weak_candidates(random, order, order / 2, 1e-9), order / 2);
    FrontCase reused = fresh;
    fresh.run({});
    reused.run({});  // sets up the members; eliminated once more below with the old scratch
    for (Index j = 0; j < order; ++j) {
      for (Index i = j; i < order; ++i) reused.front().matrix.at(i, j) = reused.original(i, j);
      reused.label[static_cast<std::size_t>(j)] = j;
      reused.row_error[static_cast<std::size_t>(j)] = reused.growth[static_cast<std::size_t>(j)] = 0;
    }
    reused.result = eliminate_front(reused.front(), {}, scratch, nullptr);
    test::expect_same_outcome(fresh, reused);
  }
}

}  // namespace
}  // namespace stanchion
