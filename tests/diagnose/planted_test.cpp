// Planted defects: kind, number and nodes must come out as they were put in.
#include <gtest/gtest.h>

#include <cstdio>

#include "diagnose/combination.hpp"
#include "diagnose/planted.hpp"
#include "model/exit_code.hpp"

namespace stanchion {
namespace {

using namespace test;

/// Every node of the mesh that is cut off at x > `cut` by the specimen's own fault lies there.
bool all_beyond(const PlantedModel& model, const Direction& direction, double cut) {
  return std::all_of(direction.nodes.begin(), direction.nodes.end(),
                     [&](const DofShare& d) { return d.node && model.place.at(*d.node)[0] > cut - 1e-9; });
}

struct Size {
  const char* name;
  Offset unknowns;
};

class Planted : public testing::TestWithParam<Size> {
 protected:
  PlantedModel model_of(Fault fault, unsigned seed = 3) {
    PlantedModel model;
    model.append(specimen_with(GetParam().name, GetParam().unknowns, fault), 0, 0);
    if (seed != 0) model.shuffle(seed);
    return model;
  }
  Outcome ask(const PlantedModel& model) {
    ModelFiles files;
    Outcome outcome = answer(run_locate(model.request(files), {}));
    outcome.command = "locate";
    return outcome;
  }
};

TEST_P(Planted, SoundModelHasNoCause) {
  const Outcome outcome = ask(model_of(Fault::kNone));
  ASSERT_TRUE(outcome.located);
  EXPECT_TRUE(outcome.located->directions.empty()) << summary(outcome);
  EXPECT_EQ(exit_code(outcome, {}), kExitGood);
  EXPECT_TRUE(outcome.located->accuracy);
}

TEST_P(Planted, FreeModelIsOneLoosePartWithSixMotions) {
  const Outcome outcome = ask(model_of(Fault::kFree));
  ASSERT_EQ(outcome.located->directions.size(), 1U) << summary(outcome);
  const Direction& direction = outcome.located->directions[0];
  EXPECT_EQ(direction.cause, Cause::kLoosePart);
  EXPECT_EQ(direction.count, 6);
  EXPECT_EQ(direction.sign, 0);
  EXPECT_EQ(direction.motions,
            (std::vector<std::string>{"translation x", "translation y", "translation z", "rotation about x",
                                      "rotation about y", "rotation about z"}));
  EXPECT_EQ(direction.moving_nodes, outcome.located->components[0].nodes);
  EXPECT_LT(std::fabs(direction.energy), 1e-13);
  EXPECT_EQ(exit_code(outcome, {}), kExitNotGood);
}

TEST_P(Planted, LoosePartIsFoundWithItsNodes) {
  const PlantedModel model = model_of(Fault::kLoosePart);
  const Outcome outcome = ask(model);
  ASSERT_EQ(outcome.located->directions.size(), 1U) << summary(outcome);
  const Direction& direction = outcome.located->directions[0];
  EXPECT_EQ(direction.cause, Cause::kLoosePart);
  EXPECT_EQ(direction.count, 6);
  ASSERT_EQ(outcome.located->components.size(), 2U);
  // The part cut off is the smaller one; all of its nodes move, and none of the others.
  const auto& parts = outcome.located->components;
  const std::size_t small = parts[0].rows < parts[1].rows ? 0 : 1;
  EXPECT_EQ(static_cast<std::size_t>(*direction.component), small);
  EXPECT_EQ(direction.moving_nodes, parts[small].nodes);
  EXPECT_EQ(parts[small].nullity, 6);
  EXPECT_EQ(parts[1 - small].nullity, 0);
  EXPECT_NE(direction.explanation.find("lie at one place"), std::string::npos) << direction.explanation;
}

TEST_P(Planted, NegativeSpringIsFoundAtItsDof) {
  if (std::string(GetParam().name) == "laplace") return;
  PlantedModel sound = model_of(Fault::kNone, 0), model = model_of(Fault::kNegativeSpring, 0);
  Index at = -1;  // the one diagonal entry in which the two differ
  const SymmetricMatrix a = sound.matrix(), b = model.matrix();
  for (Index j = 0; j < a.rows; ++j) {
    if (a.value[a.column_start[j]] != b.value[b.column_start[j]]) at = j;
  }
  ASSERT_GE(at, 0);
  const std::int64_t node = model.node[static_cast<std::size_t>(at)];
  const std::string dof = model.dof[static_cast<std::size_t>(at)];
  const auto renamed = model.shuffle(11);
  const Outcome outcome = ask(model);
  ASSERT_EQ(outcome.located->directions.size(), 1U) << summary(outcome);
  const Direction& direction = outcome.located->directions[0];
  EXPECT_EQ(direction.cause, Cause::kNegativeSpring);
  EXPECT_EQ(direction.sign, -1);
  EXPECT_EQ(direction.count, 1);
  EXPECT_LT(direction.energy, 0);
  ASSERT_FALSE(direction.nodes.empty());
  EXPECT_EQ(direction.nodes[0].node, renamed.at(node));
  EXPECT_EQ(direction.nodes[0].dof, dof);
  char stiffness[40];
  std::snprintf(stiffness, sizeof(stiffness), "of stiffness %.4g ",
                b.value[b.column_start[at]] - a.value[a.column_start[at]]);
  EXPECT_NE(direction.explanation.find(stiffness), std::string::npos) << direction.explanation << stiffness;
}

INSTANTIATE_TEST_SUITE_P(Specimens, Planted,
                         testing::Values(Size{"solid", 500}, Size{"solid", 6000}, Size{"plate", 600},
                                         Size{"plate", 8000}, Size{"frame", 600}, Size{"frame", 6000},
                                         Size{"lattice", 900}, Size{"cylinder", 600}, Size{"cylinder", 6000}),
                         [](const auto& given) {
                           return given.param.name + std::string("_") + std::to_string(given.param.unknowns);
                         });

Outcome ask(const PlantedModel& model, bool with_dofs = true, bool with_nodes = true) {
  ModelFiles files;
  Outcome outcome = answer(run_locate(model.request(files, with_dofs, with_nodes), {}));
  outcome.command = "locate";
  return outcome;
}

TEST(PlantedHinge, OfASolidTurnsAboutTheEdgeThatHoldsIt) {
  PlantedModel model;
  model.append(specimen_with("solid", 3000, Fault::kHinge), 0, 0);
  model.shuffle(5);
  const Outcome outcome = ask(model);
  ASSERT_EQ(outcome.located->directions.size(), 1U) << summary(outcome);
  const Direction& direction = outcome.located->directions[0];
  EXPECT_EQ(direction.cause, Cause::kMechanism);
  EXPECT_EQ(direction.count, 1);
  // The cut is at 6 m of 8 m, the hinge at the lower edge: the axis is y through (6, ., 0).
  EXPECT_EQ(direction.motions, std::vector<std::string>{"rotation about y through (6, 2, 0)"});
  EXPECT_TRUE(all_beyond(model, direction, 6));
}

TEST(PlantedHinge, OfAStoreyLeavesSwayAndTwist) {
  PlantedModel model;
  model.append(specimen_with("frame", 3000, Fault::kHinge), 0, 0);
  model.shuffle(6);
  const Outcome outcome = ask(model);
  ASSERT_EQ(outcome.located->directions.size(), 1U) << summary(outcome);
  EXPECT_EQ(outcome.located->directions[0].cause, Cause::kLoosePart);
  EXPECT_EQ(outcome.located->directions[0].count, 3);
  EXPECT_EQ(outcome.located->directions[0].motions,
            (std::vector<std::string>{"translation x", "translation y", "rotation about z"}));
}

TEST(PlantedSoftSpring, IsPositiveAndWeak) {
  for (const char* name : {"solid", "plate", "frame"}) {
    PlantedModel model;
    model.append(specimen_with(name, 3000, Fault::kSoftSpring), 0, 0);
    model.shuffle(8);
    const Outcome outcome = ask(model);
    ASSERT_EQ(outcome.located->directions.size(), 1U) << name << "\n" << summary(outcome);
    const Direction& direction = outcome.located->directions[0];
    EXPECT_EQ(direction.cause, Cause::kNearMechanism) << name;
    EXPECT_EQ(direction.sign, 1) << name;
    EXPECT_EQ(direction.count, 6) << name;
    EXPECT_GT(direction.energy, 0) << name;
    EXPECT_LT(direction.energy, 1e-7) << name;
    EXPECT_EQ(outcome.check->verdict, Verdict::kPositiveDefinite) << name;
  }
}

TEST(PlantedDofs, EmptyRowsAreUnattached) {
  PlantedModel model;
  model.append(specimen_with("solid", 600, Fault::kNone), 0, 0);
  model.add_dof(90, "t");
  const Outcome outcome = ask(model);
  ASSERT_EQ(outcome.located->directions.size(), 1U) << summary(outcome);
  const Direction& direction = outcome.located->directions[0];
  EXPECT_EQ(direction.cause, Cause::kUnattachedDof);
  EXPECT_EQ(direction.count, 1);
  ASSERT_EQ(direction.nodes.size(), 1U);
  EXPECT_EQ(direction.nodes[0].node, 90);
  EXPECT_EQ(direction.nodes[0].dof, "t");
  EXPECT_DOUBLE_EQ(direction.nodes[0].share, 1);
}

/// rx, ry of a plate and an added rz of no stiffness, turned into other axes at every node: no row is empty
/// then.
PlantedModel tilted_plate(double angle) {
  PlantedModel flat;
  flat.append(specimen_with("plate", 3000, Fault::kNone), 0, 0);
  std::map<std::int64_t, std::array<Index, 3>>
      rotations;  // equations rx, ry, rz of nodes that have both of the first
  std::map<std::int64_t, std::array<Index, 2>> both;
  for (Index e = 0; e < flat.rows(); ++e) {
    auto& pair =
        both.try_emplace(flat.node[static_cast<std::size_t>(e)], std::array<Index, 2>{-1, -1}).first->second;
    if (flat.dof[static_cast<std::size_t>(e)] == "rx") pair[0] = e;
    if (flat.dof[static_cast<std::size_t>(e)] == "ry") pair[1] = e;
  }
  for (const auto& [node, pair] : both) {
    if (pair[0] < 0 || pair[1] < 0) continue;
    flat.add_dof(node, "rz");
    rotations[node] = {pair[0], pair[1], flat.rows() - 1};
  }
  // (rx, rz) of every node turned by `angle`: K' = T^T K T, applied entry by entry.
  std::vector<std::pair<Index, Index>> partner(static_cast<std::size_t>(flat.rows()), {-1, 0});
  for (const auto& [node, r] : rotations) {
    partner[static_cast<std::size_t>(r[0])] = {r[2], 0};
    partner[static_cast<std::size_t>(r[2])] = {r[0], 1};
  }
  const double c = std::cos(angle), s = std::sin(angle);
  const SymmetricMatrix k = flat.matrix();
  std::vector<Triplet> turned;
  const auto spread = [&](Index e) {
    std::vector<std::pair<Index, double>> terms;
    const auto [other, role] = partner[static_cast<std::size_t>(e)];
    if (other < 0) return std::vector<std::pair<Index, double>>{{e, 1.0}};
    terms.emplace_back(e, c);
    terms.emplace_back(other, role == 0 ? s : -s);
    return terms;
  };
  for (Index j = 0; j < k.rows; ++j) {
    for (Offset p = k.column_start[j]; p < k.column_start[Offset{j} + 1]; ++p) {
      const Index i = k.row[p];
      for (const auto& [a, x] : spread(i)) {
        for (const auto& [b, y] : spread(j)) {
          // The lower triangle of K' from both triangles of K.
          if (a >= b) turned.push_back({a, b, x * y * k.value[p]});
          if (i != j && b >= a) turned.push_back({b, a, x * y * k.value[p]});
        }
      }
    }
  }
  flat.entries = std::move(turned);
  return flat;
}

TEST(PlantedRotations, WithoutStiffnessAreOneCauseHoweverManyNodes) {
  for (const double angle : {0.0, 0.6}) {
    PlantedModel model = tilted_plate(angle);
    const auto count = std::count(model.dof.begin(), model.dof.end(), "rz");
    model.shuffle(9);
    const Outcome outcome = ask(model);
    EXPECT_EQ(outcome.check->inertia.zero, count) << angle;
    ASSERT_EQ(outcome.located->directions.size(), 1U) << angle << "\n" << summary(outcome);
    const Direction& direction = outcome.located->directions[0];
    EXPECT_EQ(direction.cause, Cause::kMissingRotation) << angle;
    EXPECT_EQ(direction.count, count) << angle;
    EXPECT_EQ(direction.moving_nodes, count) << angle;
  }
}

class Combined : public testing::TestWithParam<Size> {};

TEST_P(Combined, EveryDefectIsNamedApartWithItsNodes) {
  for (const unsigned seed : {1U, 2U}) {
    const Combination made = combination_of(GetParam().name, GetParam().unknowns, seed);
    expect_planted(made, ask(made.model));
  }
}

INSTANTIATE_TEST_SUITE_P(Specimens, Combined,
                         testing::Values(Size{"solid", 500}, Size{"solid", 4000}, Size{"plate", 600},
                                         Size{"plate", 6000}, Size{"frame", 600}, Size{"frame", 4000},
                                         Size{"lattice", 900}, Size{"cylinder", 600}, Size{"cylinder", 4000},
                                         Size{"saddle", 900}, Size{"column", 600}, Size{"laplace", 600}),
                         [](const auto& given) {
                           return given.param.name + std::string("_") + std::to_string(given.param.unknowns);
                         });

/// Places written to six decimals and entries to twelve digits: what is zero is so at the resolution only.
TEST(CombinedRounded, EveryDefectIsNamedApartWithItsNodes) {
  for (const char* name : {"solid", "plate", "cylinder", "frame", "lattice", "saddle"}) {
    SCOPED_TRACE(name);
    const Combination made = combination_of(name, 900, 3, {1e-6, 1e-12});
    expect_planted(made, ask(made.model));
  }
}

/// All at once, in one model of four parts: hinge, loose part with its seam, soft spring, rotations without
/// stiffness, a negative spring, an unattached dof.
TEST(PlantedTogether, EveryDefectIsNamedApart) {
  for (const unsigned seed : {1U, 2U, 3U}) {
    PlantedModel model = tilted_plate(0.4);
    const auto rotations = std::count(model.dof.begin(), model.dof.end(), "rz");
    model.append(specimen_with("solid", 1500, Fault::kHinge), 10000, 20);
    model.append(specimen_with("solid", 1500, Fault::kLoosePart), 20000, 40);
    model.append(specimen_with("frame", 1500, Fault::kSoftSpring), 30000, 60);
    model.add_dof(10100, "t");
    const Index at = model.equation(20090, "uz");
    model.entries.push_back({at, at, -4 * model.diagonal(at)});
    const auto renamed = model.shuffle(seed);
    const Outcome outcome = ask(model);
    EXPECT_EQ(outcome.check->inertia.negative, 1);
    EXPECT_EQ(outcome.check->inertia.zero, rotations + 1 + 6 + 1);
    EXPECT_EQ(outcome.located->not_located, 0);
    ASSERT_EQ(outcome.located->directions.size(), 6U) << summary(outcome);
    const auto only = [&](Cause cause) {
      const auto found = of_cause(outcome, cause);
      EXPECT_EQ(found.size(), 1U) << static_cast<int>(cause) << "\n" << summary(outcome);
      return found.empty() ? Direction{} : found[0];
    };
    EXPECT_EQ(only(Cause::kMissingRotation).count, rotations);
    EXPECT_EQ(only(Cause::kMechanism).count, 1);
    EXPECT_EQ(only(Cause::kLoosePart).count, 6);
    EXPECT_NE(only(Cause::kLoosePart).explanation.find("lie at one place"), std::string::npos);
    EXPECT_EQ(only(Cause::kNearMechanism).count, 6);
    EXPECT_EQ(only(Cause::kUnattachedDof).nodes.at(0).node, renamed.at(10100));
    const Direction spring = only(Cause::kNegativeSpring);
    ASSERT_FALSE(spring.nodes.empty());
    EXPECT_EQ(spring.nodes[0].node, renamed.at(20090));
    EXPECT_EQ(spring.nodes[0].dof, "uz");
  }
}

/// Everything in one connected body: a free block of bricks whose end hangs on one edge has six rigid motions
/// and a hinge, which are seven directions with two causes.
TEST(PlantedTogether, SixRigidMotionsAndAHingeOfOneBodyComeApart) {
  PlantedModel model;
  Specimen hinged = specimen_with("solid", 1500, Fault::kHinge);
  const Specimen free = specimen_with("solid", 1500, Fault::kFree);
  // The clamped face of the hinged block gets its bricks' stiffness back from the free block: both have the
  // same mesh up to the cut, so the missing rows are those of the free block.
  std::map<std::pair<Index, int>, Index> of_hinged, of_free;
  for (std::size_t e = 0; e < hinged.dofs.size(); ++e)
    of_hinged[{hinged.dofs[e].node, static_cast<int>(hinged.dofs[e].dof)}] = static_cast<Index>(e);
  for (std::size_t e = 0; e < free.dofs.size(); ++e)
    of_free[{free.dofs[e].node, static_cast<int>(free.dofs[e].dof)}] = static_cast<Index>(e);
  model.append(hinged, 0, 0);
  std::map<Index, Index> added;  // equation of the free block -> new equation
  for (const auto& [key, e] : of_free) {
    if (of_hinged.count(key) == 0) {
      added[e] = model.rows();
      model.add_dof(key.first, specimen::dof_name(static_cast<specimen::Dof>(key.second)));
    }
  }
  const SymmetricMatrix& k = free.stiffness;
  const auto number = [&](Index e) {
    if (const auto at = added.find(e); at != added.end()) return at->second;
    const auto& d = free.dofs[static_cast<std::size_t>(e)];
    return of_hinged.at({d.node, static_cast<int>(d.dof)});
  };
  for (Index j = 0; j < k.rows; ++j) {
    for (Offset p = k.column_start[j]; p < k.column_start[Offset{j} + 1]; ++p) {
      if (added.count(j) + added.count(k.row[p]) > 0)
        model.entries.push_back({number(k.row[p]), number(j), k.value[p]});
    }
  }
  model.shuffle(4);
  const Outcome outcome = ask(model);
  EXPECT_EQ(outcome.check->inertia.zero, 7);
  ASSERT_EQ(outcome.located->directions.size(), 2U) << summary(outcome);
  const auto loose = of_cause(outcome, Cause::kLoosePart), hinge = of_cause(outcome, Cause::kMechanism);
  ASSERT_EQ(loose.size(), 1U) << summary(outcome);
  ASSERT_EQ(hinge.size(), 1U) << summary(outcome);
  EXPECT_EQ(loose[0].count, 6);
  EXPECT_EQ(hinge[0].count, 1);
  EXPECT_LT(hinge[0].moving_nodes, loose[0].moving_nodes);
}

TEST(PlantedCoupling, OverStiffRowsAreNamedWithTheDigitsTheyCost) {
  PlantedModel model;
  model.append(specimen_with("solid", 600, Fault::kNone), 0, 0);
  const Index a = model.equation(60, "ux"), b = model.equation(61, "ux");
  const double stiff = 1e11 * model.diagonal(a);
  model.entries.insert(model.entries.end(),
                       {{a, a, stiff}, {b, b, stiff}, {std::max(a, b), std::min(a, b), -stiff}});
  const Outcome outcome = ask(model);
  ASSERT_EQ(outcome.located->directions.size(), 1U) << summary(outcome);
  const Direction& direction = outcome.located->directions[0];
  EXPECT_EQ(direction.cause, Cause::kOverStiffCoupling);
  EXPECT_EQ(direction.sign, 1);
  EXPECT_NE(direction.explanation.find("about 11 of 16"), std::string::npos) << direction.explanation;
}

TEST(Located, LongColumnIsUnresolvedNotAMechanism) {
  PlantedModel model;
  model.append(specimen_with("column", 20000, Fault::kNone), 0, 0);
  const Outcome outcome = ask(model);
  ASSERT_FALSE(outcome.located->directions.empty());
  for (const Direction& d : outcome.located->directions)
    EXPECT_EQ(d.cause, Cause::kUnresolved) << d.explanation;
  EXPECT_EQ(exit_code(outcome, {}), kExitUnresolved);
}

TEST(Located, SameBitsForEveryNumberOfThreads) {
  PlantedModel model;
  model.append(specimen_with("solid", 3000, Fault::kHinge), 0, 0);
  ModelFiles files;
  Request request = model.request(files);
  request.threads = 1;
  const Outcome one = answer(run_locate(request, {}));
  request.threads = 3;
  const Outcome three = answer(run_locate(request, {}));
  ASSERT_EQ(one.located->directions.size(), three.located->directions.size());
  for (std::size_t k = 0; k < one.located->directions.size(); ++k) {
    const Direction &a = one.located->directions[k], &b = three.located->directions[k];
    EXPECT_EQ(a.energy, b.energy);
    EXPECT_EQ(a.residual, b.residual);
    ASSERT_EQ(a.nodes.size(), b.nodes.size());
    for (std::size_t n = 0; n < a.nodes.size(); ++n) EXPECT_EQ(a.nodes[n].share, b.nodes[n].share);
  }
}

}  // namespace
}  // namespace stanchion
