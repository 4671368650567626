// Constraints that repeat others: how many, which, and what is left to the iteration.
#include <gtest/gtest.h>

#include <set>
#include <vector>

#include "diagnose/planted.hpp"

namespace stanchion {
namespace {

using namespace test;

/// Springs in a row, the first to the ground. Nodes from 1; multipliers get nodes from 1001.
class TiedChain {
 public:
  explicit TiedChain(std::int64_t nodes = 40) {
    for (std::int64_t k = 1; k <= nodes; ++k) {
      model.place[k] = {static_cast<double>(k), 0, 0};
      model.add_dof(k, "ux");
    }
    for (std::int64_t k = 1; k < nodes; ++k) model.add_link(k, k + 1, "ux", 1);
    model.entries.push_back({0, 0, 1});
  }

  /// first u_a + second u_b = 0; returns the node of its multiplier.
  std::int64_t tie(std::int64_t a, std::int64_t b, double first, double second) {
    const std::int64_t node = ++last_;
    model.place[node] = {0, static_cast<double>(node), 0};
    model.add_dof(node, "multiplier");
    const Index row = model.rows() - 1;
    model.entries.push_back({row, model.equation(a, "ux"), first});
    model.entries.push_back({row, model.equation(b, "ux"), second});
    return node;
  }

  PlantedModel model;

 private:
  std::int64_t last_ = 1000;
};

std::set<std::int64_t> nodes_of(const Direction& direction) {
  std::set<std::int64_t> nodes;
  for (const DofShare& share : direction.nodes) nodes.insert(share.node.value_or(-1));
  return nodes;
}

double shares_of(const Direction& direction) {
  double sum = 0;
  for (const DofShare& share : direction.nodes) sum += share.share;
  return sum;
}

/// The one entry of a model where `zero` constraints are too many and nothing else is amiss.
Direction only_entry(const Outcome& outcome, Index zero) {
  EXPECT_EQ(outcome.located->zero, zero);
  EXPECT_EQ(outcome.located->not_located, 0);
  EXPECT_EQ(outcome.located->directions.size(), 1U) << summary(outcome);
  if (outcome.located->directions.empty()) return {};
  const Direction& found = outcome.located->directions.front();
  EXPECT_EQ(found.cause, Cause::kRedundantConstraint);
  EXPECT_EQ(found.count, zero);
  return found;
}

TEST(RepeatedConstraints, ThoseInProportionAreOneEntry) {
  TiedChain chain;
  std::set<std::int64_t> repeated;
  for (const double factor : {1.0, 2.5, -0.3}) repeated.insert(chain.tie(1, 5, factor, -factor));
  for (const double factor : {7.0, -1.1}) repeated.insert(chain.tie(10, 14, factor, 0.37 * factor));
  chain.tie(20, 24, 1, -1);  // not repeated: other dofs, or other coefficients
  chain.tie(20, 25, 1, -1);
  chain.tie(30, 34, 1, -1);
  chain.tie(30, 34, 1, 1);
  chain.tie(36, 38, 1, -1);
  chain.tie(36, 38, 1, -1 + 1e-5);
  const auto renamed = chain.model.shuffle(5);
  std::set<std::int64_t> expected;
  for (const std::int64_t node : repeated) expected.insert(renamed.at(node));
  const Outcome outcome = located(chain.model);
  const Direction found = only_entry(outcome, 3);
  EXPECT_EQ(found.moving_nodes, 5);
  EXPECT_EQ(nodes_of(found), expected);
  EXPECT_NEAR(shares_of(found), 1, 1e-12);
  ASSERT_TRUE(found.residual);
  EXPECT_LE(*found.residual, 1e-12);
}

/// More than the 62 zero directions of one part that the iteration looks at together.
TEST(RepeatedConstraints, AHundredPairsAreAllNamed) {
  TiedChain chain(110);
  for (int k = 0; k < 100; ++k) {
    chain.tie(1 + k, 2 + k, 1, 1.0 + 0.1 * k);
    chain.tie(1 + k, 2 + k, -3, -3.0 - 0.3 * k);
  }
  const Outcome outcome = located(chain.model);
  EXPECT_EQ(only_entry(outcome, 100).moving_nodes, 200);
}

/// More of one group than are taken together.
TEST(RepeatedConstraints, OneConstraintManyTimesOver) {
  TiedChain chain;
  constexpr int kTimes = 130;
  for (int k = 0; k < kTimes; ++k) chain.tie(3, 30, 1 + 0.01 * k, -2 - 0.02 * k);
  const Outcome outcome = located(chain.model);
  EXPECT_EQ(outcome.located->zero, kTimes - 1);
  EXPECT_EQ(outcome.located->not_located, 0);
  Index named = 0;
  for (const Direction& found : of_cause(outcome, Cause::kRedundantConstraint)) named += found.count;
  EXPECT_EQ(named, kTimes - 1) << summary(outcome);
}

/// A ring of ties closes itself: no two of them are in proportion.
TEST(RepeatedConstraints, ARingOfTiesIsAnEntryOfItsOwn) {
  TiedChain chain;
  std::set<std::int64_t> ring{chain.tie(4, 9, 1, -1), chain.tie(9, 15, 1, -1), chain.tie(15, 4, 1, -1)};
  std::set<std::int64_t> pair{chain.tie(25, 28, 1, -1), chain.tie(28, 25, 1, -1)};
  const Outcome outcome = located(chain.model);
  const auto found = of_cause(outcome, Cause::kRedundantConstraint);
  ASSERT_EQ(found.size(), 2U) << summary(outcome);
  EXPECT_EQ(outcome.located->directions.size(), 2U);
  for (const Direction& one : found) {
    EXPECT_EQ(one.count, 1);
    EXPECT_EQ(nodes_of(one), one.moving_nodes == 3 ? ring : pair);
  }
  EXPECT_NE(found[0].moving_nodes, found[1].moving_nodes);
}

/// Rings over rings: more than the 62 zero directions of one part that the iteration looks at together.
TEST(RepeatedConstraints, AHundredRingsAreOneEntryWithAllTheirNodes) {
  TiedChain chain(350);
  std::set<std::int64_t> ties;
  for (int k = 0; k < 100; ++k) {
    const int a = 1 + 3 * k, b = a + 17, c = a + 34;
    ties.insert(chain.tie(a, b, 2, -2));
    ties.insert(chain.tie(b, c, 0.5, -0.25));
    ties.insert(chain.tie(c, a, 3, -6));
  }
  chain.model.shuffle(3);
  const Outcome outcome = located(chain.model);
  const Direction found = only_entry(outcome, 100);
  EXPECT_EQ(found.moving_nodes, static_cast<Index>(ties.size()));
  EXPECT_LE(found.residual.value_or(1), 1e-12);
}

/// All of one strip hang together: of 2 n ties over n + 2 nodes n - 1 are too many. The long one's vectors
/// are made orthonormal one by one.
class Strip : public testing::TestWithParam<int> {};
INSTANTIATE_TEST_SUITE_P(RepeatedConstraints, Strip, testing::Values(300, 1200));

TEST_P(Strip, HangsTogether) {
  const int length = GetParam();
  TiedChain chain(length + 2);
  for (int k = 1; k <= length; ++k) {
    chain.tie(k, k + 1, 1, -1);
    chain.tie(k, k + 2, 1, -1);
  }
  const Outcome outcome = located(chain.model);
  only_entry(outcome, length - 1);
}

/// Everything tied to everything: 741 of 780 are too many, and nearly every pivot of the constraints' own
/// matrix is delayed, far beyond its forecast.
TEST(RepeatedConstraints, EveryNodeTiedToEveryOther) {
  constexpr int kNodes = 40;
  TiedChain chain(kNodes);
  for (int a = 1; a <= kNodes; ++a) {
    for (int b = 1; b < a; ++b) chain.tie(a, b, 1, -1);
  }
  const Outcome outcome = located(chain.model);
  constexpr int kTies = kNodes * (kNodes - 1) / 2;
  EXPECT_EQ(only_entry(outcome, kTies - (kNodes - 1)).moving_nodes, kTies);
}

/// Rings, pairs, and a loose end beside them: each is told from the others.
TEST(RepeatedConstraints, RingsBesidePairsAndALooseNode) {
  TiedChain chain(400);
  for (int k = 0; k < 80; ++k) {
    const int a = 3 * k + 1;
    for (const auto& [p, q] : {std::pair{a, a + 1}, std::pair{a + 1, a + 2}, std::pair{a + 2, a}})
      chain.tie(p, q, 1, -1);
  }
  for (int a = 241; a < 380; a += 2) {
    chain.tie(a, a + 1, 1, 0.5);
    chain.tie(a, a + 1, 2, 1);
  }
  chain.model.place[900] = {5, 5, 0};
  chain.model.place[901] = {6, 5, 0};
  chain.model.add_dof(900, "ux");
  chain.model.add_dof(901, "ux");
  chain.model.add_link(900, 901, "ux", 1);
  const Outcome outcome = located(chain.model);
  EXPECT_EQ(outcome.located->zero, 151);
  EXPECT_EQ(outcome.located->not_located, 0);
  std::multiset<Index> counts;
  for (const Direction& one : of_cause(outcome, Cause::kRedundantConstraint)) counts.insert(one.count);
  EXPECT_EQ(counts, (std::multiset<Index>{70, 80})) << summary(outcome);
  const auto loose = of_cause(outcome, Cause::kLoosePart);
  ASSERT_EQ(loose.size(), 1U) << summary(outcome);
  EXPECT_EQ(nodes_of(loose[0]), (std::set<std::int64_t>{900, 901}));
}

/// A ring that misses by a thousandth does not close: nothing is redundant, and nothing is named so.
TEST(RepeatedConstraints, ARingThatDoesNotCloseIsNone) {
  TiedChain chain;
  chain.tie(4, 9, 1, -1);
  chain.tie(9, 15, 1, -1);
  chain.tie(15, 4, 1, -1.001);
  const Outcome outcome = located(chain.model);
  EXPECT_EQ(outcome.located->zero, 0);
  EXPECT_TRUE(of_cause(outcome, Cause::kRedundantConstraint).empty()) << summary(outcome);
}

/// Nobody says which equations are multipliers: no diagonal, but entries.
TEST(RepeatedConstraints, AreSeenWithoutADofMap) {
  TiedChain chain;
  for (int k = 0; k < 3; ++k) chain.tie(8, 12, 1 + k, -1 - k);
  const Index first = chain.model.rows() - 2;
  for (std::string& name : chain.model.dof) {
    if (name == "multiplier") name = "ux";
  }
  const Outcome outcome = located(chain.model, false, false);
  const auto found = of_cause(outcome, Cause::kRedundantConstraint);
  ASSERT_EQ(found.size(), 1U) << summary(outcome);
  EXPECT_EQ(found[0].count, 2);
  ASSERT_EQ(found[0].nodes.size(), 3U);
  for (const DofShare& share : found[0].nodes) EXPECT_GE(share.equation, first);
}

}  // namespace
}  // namespace stanchion
