// What the words say: by nodes, by equations where a table is missing or damaged, and no more than is known.
#include <gtest/gtest.h>

#include "diagnose/planted.hpp"
#include "diagnose/words.hpp"

namespace stanchion {
namespace {

using namespace test;

TEST(PlantedNames, NumbersOfThingsAreGroupedNumbersOfNodesAreNot) {
  CauseFacts facts;
  facts.cause = Cause::kRedundantConstraint;
  facts.count = 2999;
  facts.nodes = 12000;
  facts.place = "node 45678, lm1";
  EXPECT_EQ(explanation_of(facts),
            "2,999 constraints repeat others: the multipliers of 12,000 nodes, node 45678 among them, can "
            "exchange force among themselves without any effect on the structure.");
}

TEST(PlantedNames, WithoutMapsEquationsAreNamed) {
  PlantedModel model;
  model.append(specimen_with("solid", 1500, Fault::kLoosePart), 0, 0);
  const Outcome by_dof = located(model, true, false), by_equation = located(model, false, false);
  ASSERT_EQ(by_dof.located->directions.size(), 1U) << summary(by_dof);
  EXPECT_EQ(by_dof.located->directions[0].cause, Cause::kLoosePart);
  EXPECT_EQ(by_dof.located->directions[0].count, 6);
  Index zero = 0;
  for (const Direction& d : by_equation.located->directions) {
    EXPECT_EQ(d.cause, Cause::kLoosePart) << d.explanation;
    EXPECT_FALSE(d.nodes.at(0).node);
    EXPECT_EQ(d.nodes.at(0).dof.rfind("equation ", 0), 0U);
    zero += d.count;
  }
  EXPECT_EQ(zero, 6);
}

/// Without a dof map no translation is known, by which a spring to the ground could be measured: the words
/// claim no stiffness, and what they say of adding some is true.
TEST(PlantedNames, OfASpringThatCannotBeMeasuredOnlyABoundIsStated) {
  constexpr Index kRows = 20;
  std::vector<Triplet> entries;
  for (Index k = 0; k < kRows; ++k) {
    entries.push_back({k, k, k == 9 ? -5.0 : 2.0});
    if (k > 0) entries.push_back({k, k - 1, -1});
  }
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.npz", from_triplets(kRows, entries));
  const Outcome outcome = answer(run_locate(request, {}));
  ASSERT_EQ(outcome.located->directions.size(), 1U) << summary(outcome);
  const Direction& direction = outcome.located->directions[0];
  EXPECT_EQ(direction.cause, Cause::kNegativeSpring);
  EXPECT_EQ(direction.explanation.rfind("Equation 10: the diagonal entry is -5 ", 0), 0U)
      << direction.explanation;
  EXPECT_NE(direction.explanation.find("Adding 10 there"), std::string::npos) << direction.explanation;
  EXPECT_EQ(direction.explanation.find("of stiffness"), std::string::npos) << direction.explanation;
  entries.push_back({9, 9, 10});
  request.input.stiffness = files.matrix("mended.npz", from_triplets(kRows, entries));
  EXPECT_EQ(answer(run_locate(request, {})).check->inertia.negative, outcome.check->inertia.negative - 1);
}

TEST(PlantedNames, EquationsWithoutAnythingAreCountedOnce) {
  ModelFiles files;
  Request request;
  request.input.stiffness =
      files.matrix("K.npz", from_triplets(4, {{0, 0, 1}, {1, 1, 0}, {2, 2, 0}, {3, 3, 0}}));
  const Outcome outcome = answer(run_locate(request, {}));
  ASSERT_EQ(outcome.located->directions.size(), 1U) << summary(outcome);
  EXPECT_EQ(
      outcome.located->directions[0].explanation,
      "3 equations, equation 2 among them, have no stiffness at all: nothing is attached to these dofs.");
}

TEST(PlantedNames, DamagedTablesAreLeftOutWithANote) {
  PlantedModel model;
  model.append(specimen_with("solid", 600, Fault::kLoosePart), 0, 0);
  ModelFiles files;
  Request request = model.request(files);
  request.input.dofs = files.text("bad_dofs.csv", "equation,node,dof\n1,7\n");
  request.input.nodes = files.text("bad_nodes.csv", "node,x,y,z\n7,zero,0,0\n");
  request.input.axes = files.text("bad_axes.csv", "7,1,2,3\n");
  const Outcome outcome = answer(run_locate(request, {}));
  EXPECT_TRUE(warned(outcome, "dof-map-unusable"));
  EXPECT_TRUE(warned(outcome, "nodes-unusable"));
  EXPECT_TRUE(warned(outcome, "axes-unusable"));
  ASSERT_TRUE(outcome.located);
  Index zero = 0;
  for (const Direction& d : outcome.located->directions) zero += d.count;
  EXPECT_EQ(zero, 6);
  request.input.dofs = "/no/such/dofs.csv";
  EXPECT_TRUE(warned(answer(run_locate(request, {})), "dof-map-unusable"));
}

/// Multipliers that nobody listed are not faults of the structure.
TEST(PlantedNames, MultipliersLostWithADamagedMapAreNotNamedAsFaults) {
  PlantedModel model;
  model.append(specimen_with("saddle", 900, Fault::kRepeatedTie), 0, 0);
  ModelFiles files;
  Request request = model.request(files);
  request.input.multipliers.reset();
  request.input.dofs = files.text("cut.csv", "equation,node,dof\n1,7,ux\n2,7\n");
  const Outcome outcome = answer(run_locate(request, {}));
  EXPECT_TRUE(warned(outcome, "dof-map-unusable"));
  ASSERT_TRUE(outcome.located);
  const auto ties = std::count(model.dof.begin(), model.dof.end(), "multiplier");
  EXPECT_EQ(outcome.check->inertia.negative + outcome.check->inertia.zero, ties);
  Index negative = 0, zero = 0;
  for (const Direction& d : outcome.located->directions) {
    EXPECT_EQ(d.cause, d.sign < 0 ? Cause::kUnresolved : Cause::kRedundantConstraint) << d.explanation;
    (d.sign < 0 ? negative : zero) += d.count;
    if (d.sign < 0) {
      EXPECT_NE(d.remedy.find("--multipliers"), std::string::npos) << d.remedy;
    }
  }
  EXPECT_EQ(negative, outcome.check->inertia.negative);
  EXPECT_EQ(zero, outcome.check->inertia.zero);
}

TEST(PlantedNames, PlacesWithoutZOfASolidAreLeftOut) {
  PlantedModel model;
  model.append(specimen_with("solid", 900, Fault::kLoosePart), 0, 0);
  for (auto& [node, p] : model.place) p[2] = 0;
  const Outcome outcome = located(model);
  EXPECT_TRUE(warned(outcome, "nodes-unusable"));
  ASSERT_EQ(outcome.located->directions.size(), 1U) << summary(outcome);
  EXPECT_EQ(outcome.located->directions[0].cause, Cause::kLoosePart);
  EXPECT_EQ(outcome.located->directions[0].count, 6);
}

}  // namespace
}  // namespace stanchion
