// Kinds that the specimens do not have: pinned chains, hourglass patterns, springs between nodes, directions
// on constraints; local accuracy beside zero and negative directions.
#include <gtest/gtest.h>

#include "diagnose/planted.hpp"

namespace stanchion {
namespace {

using namespace test;

/// A bar of stiffness `stiffness` between two nodes at their places.
void add_bar(PlantedModel& model, std::int64_t from, std::int64_t to, double stiffness,
             const std::vector<std::string>& dofs) {
  const auto &p = model.place.at(from), &q = model.place.at(to);
  std::array<double, 3> n{q[0] - p[0], q[1] - p[1], q[2] - p[2]};
  const double length = std::sqrt(n[0] * n[0] + n[1] * n[1] + n[2] * n[2]);
  std::vector<std::pair<Index, double>> apart;
  for (std::size_t d = 0; d < dofs.size(); ++d) {
    for (const auto& [node, sign] : {std::pair{from, -1.0}, std::pair{to, 1.0}}) {
      for (Index e = 0; e < model.rows(); ++e) {
        if (model.node[static_cast<std::size_t>(e)] == node &&
            model.dof[static_cast<std::size_t>(e)] == dofs[d])
          apart.emplace_back(e, sign * n[d] / length);
      }
    }
  }
  for (const auto& [i, a] : apart) {
    for (const auto& [j, b] : apart) {
      if (i >= j) model.entries.push_back({i, j, stiffness * a * b});
    }
  }
}

/// A chain of bars between two held ends, as a polygon over a span: of m bars m - 1 joints move in two
/// directions each, and m bars resist: m - 2 motions meet no resistance.
PlantedModel polygon_of_bars(int bars) {
  PlantedModel model;
  for (int k = 0; k <= bars; ++k) {
    const double x = k;
    model.place[k + 1] = {x, 0, 0.3 * x * (bars - x) / bars + 0.01 * k * k};
    if (k == 0 || k == bars) continue;
    model.add_dof(k + 1, "ux");
    model.add_dof(k + 1, "uz");
  }
  for (int k = 0; k < bars; ++k) {
    const std::int64_t from = k + 1, to = k + 2;
    const auto &p = model.place.at(from), &q = model.place.at(to);
    const double dx = q[0] - p[0], dz = q[2] - p[2], length = std::hypot(dx, dz);
    std::vector<std::pair<Index, double>> apart;
    for (Index e = 0; e < model.rows(); ++e) {
      const std::int64_t node = model.node[static_cast<std::size_t>(e)];
      if (node != from && node != to) continue;
      const double cosine = (model.dof[static_cast<std::size_t>(e)] == "ux" ? dx : dz) / length;
      apart.emplace_back(e, node == from ? -cosine : cosine);
    }
    for (const auto& [i, a] : apart) {
      for (const auto& [j, b] : apart) {
        if (i >= j) model.entries.push_back({i, j, 2e8 / length * a * b});
      }
    }
  }
  return model;
}

TEST(PinnedChain, IsAMechanismWithAllItsMotions) {
  for (const int bars : {4, 9, 14}) {
    PlantedModel model = polygon_of_bars(bars);
    model.shuffle(3);
    const Outcome outcome = located(model);
    EXPECT_EQ(outcome.check->inertia.zero, bars - 2);
    ASSERT_EQ(outcome.located->directions.size(), 1U) << summary(outcome);
    const Direction& direction = outcome.located->directions[0];
    EXPECT_EQ(direction.cause, Cause::kMechanism) << summary(outcome);
    EXPECT_EQ(direction.count, bars - 2);
    EXPECT_EQ(direction.moving_nodes, bars - 1);
    EXPECT_NE(direction.explanation.find("pinned chain"), std::string::npos) << direction.explanation;
  }
}

/// A straight chain: nothing holds the joints across it.
TEST(PinnedChain, OfBarsInOneLineIsNamedAsSuch) {
  PlantedModel model;
  const std::vector<std::string> dofs{"ux", "uy", "uz"};
  for (int k = 0; k <= 6; ++k) {
    model.place[k + 1] = {1.5 * k, 0, 0};
    if (k == 0 || k == 6) continue;
    for (const std::string& name : dofs) model.add_dof(k + 1, name);
  }
  for (int k = 0; k < 6; ++k) add_bar(model, k + 1, k + 2, 1e8, dofs);
  const Outcome along = located(model);
  EXPECT_EQ(along.check->inertia.zero, 10);
  Index count = 0;
  for (const Direction& d : along.located->directions) {
    EXPECT_EQ(d.cause, Cause::kUnattachedDof);
    EXPECT_NE(d.explanation.find("pinned chain"), std::string::npos) << d.explanation;
    count += d.count;
  }
  EXPECT_EQ(count, 10);
  // The same chain in a slanting line has no empty rows.
  model.entries.clear();
  for (auto& [node, p] : model.place) p = {p[0], 0.5 * p[0], 0.25 * p[0]};
  for (int k = 0; k < 6; ++k) add_bar(model, k + 1, k + 2, 1e8, dofs);
  model.shuffle(5);
  const Outcome slanting = located(model);
  ASSERT_EQ(slanting.located->directions.size(), 1U) << summary(slanting);
  EXPECT_EQ(slanting.located->directions[0].cause, Cause::kMechanism);
  EXPECT_EQ(slanting.located->directions[0].count, 10);
  EXPECT_EQ(slanting.located->directions[0].moving_nodes, 5);
}

/// Square plane-stress elements with one integration point: their strain is that at the centre, so that the
/// pattern (1, -1, 1, -1) of the corners goes unfelt (Flanagan and Belytschko, Int. J. Numer. Meth. Engng 17
/// (1981)). With every other node of one edge held only the patterns remain: two, one a direction.
PlantedModel underintegrated(int nx, int ny) {
  PlantedModel model;
  const auto number = [nx](int i, int j) { return static_cast<std::int64_t>(j) * (nx + 1) + i + 1; };
  for (int j = 0; j <= ny; ++j) {
    for (int i = 0; i <= nx; ++i) {
      model.place[number(i, j)] = {1.0 * i, 1.0 * j, 0};
      if (i == 0 && j % 2 == 0) continue;
      model.add_dof(number(i, j), "ux");
      model.add_dof(number(i, j), "uy");
    }
  }
  std::map<std::pair<std::int64_t, std::string>, Index> at;
  for (Index e = 0; e < model.rows(); ++e)
    at[{model.node[static_cast<std::size_t>(e)], model.dof[static_cast<std::size_t>(e)]}] = e;
  const double modulus = 3e7, poisson = 0.2, c = modulus / (1 - poisson * poisson);
  const double law[3][3] = {{c, c * poisson, 0}, {c * poisson, c, 0}, {0, 0, c * (1 - poisson) / 2}};
  const double gx[4] = {-0.5, 0.5, 0.5, -0.5}, gy[4] = {-0.5, -0.5, 0.5, 0.5};
  for (int j = 0; j < ny; ++j) {
    for (int i = 0; i < nx; ++i) {
      const std::int64_t corner[4] = {number(i, j), number(i + 1, j), number(i + 1, j + 1), number(i, j + 1)};
      for (int p = 0; p < 8; ++p) {
        for (int q = 0; q < 8; ++q) {
          const auto row = at.find({corner[p / 2], p % 2 == 0 ? "ux" : "uy"});
          const auto column = at.find({corner[q / 2], q % 2 == 0 ? "ux" : "uy"});
          if (row == at.end() || column == at.end() || row->second < column->second) continue;
          const double bp[3] = {p % 2 == 0 ? gx[p / 2] : 0, p % 2 == 0 ? 0 : gy[p / 2],
                                p % 2 == 0 ? gy[p / 2] : gx[p / 2]};
          const double bq[3] = {q % 2 == 0 ? gx[q / 2] : 0, q % 2 == 0 ? 0 : gy[q / 2],
                                q % 2 == 0 ? gy[q / 2] : gx[q / 2]};
          double sum = 0;
          for (int r = 0; r < 3; ++r) {
            for (int s = 0; s < 3; ++s) sum += bp[r] * law[r][s] * bq[s];
          }
          model.entries.push_back({row->second, column->second, sum});
        }
      }
    }
  }
  return model;
}

TEST(Hourglass, IsAMechanismAndAPattern) {
  for (const int size : {4, 8, 20}) {
    PlantedModel model = underintegrated(2 * size, size);
    const std::map<std::int64_t, std::array<double, 3>> places = model.place;
    model.shuffle(12);
    const Outcome outcome = located(model);
    EXPECT_EQ(outcome.check->inertia.zero, 2);
    Index count = 0;
    for (const Direction& d : outcome.located->directions) {
      EXPECT_EQ(d.cause, Cause::kMechanism) << summary(outcome);
      EXPECT_NE(d.explanation.find("hourglass"), std::string::npos) << d.explanation;
      count += d.count;
      // Nodes of the other colour than the held ones move, all of them and no others.
      EXPECT_EQ(d.moving_nodes, ((2 * size + 1) * (size + 1)) / 2);
      for (const DofShare& share : d.nodes) {
        const auto& p = model.place.at(*share.node);
        EXPECT_EQ(static_cast<int>(std::lround(p[0] + p[1])) % 2, 1);
      }
    }
    EXPECT_EQ(count, 2) << summary(outcome);
  }
}

TEST(NegativeLink, BetweenTwoNodesIsNamedWithBoth) {
  for (const char* name : {"solid", "frame"}) {
    PlantedModel model;
    model.append(specimen_with(name, 3000, Fault::kNone), 0, 0);
    // Two nodes far from one another that share no element, tied by a spring that pushes.
    const std::int64_t from = model.node.front(), to = model.node.back();
    const double size =
        3 * (model.diagonal(model.equation(from, "uy")) + model.diagonal(model.equation(to, "uy")));
    model.add_link(from, to, "uy", -size);
    const auto renamed = model.shuffle(17);
    const Outcome outcome = located(model);
    EXPECT_EQ(outcome.check->inertia.negative, 1);
    ASSERT_EQ(outcome.located->directions.size(), 1U) << summary(outcome);
    const Direction& direction = outcome.located->directions[0];
    EXPECT_EQ(direction.cause, Cause::kNegativeSpring) << summary(outcome);
    ASSERT_GE(direction.nodes.size(), 2U);
    std::vector<std::int64_t> named{*direction.nodes[0].node, *direction.nodes[1].node};
    std::vector<std::int64_t> planted{renamed.at(from), renamed.at(to)};
    std::sort(named.begin(), named.end());
    std::sort(planted.begin(), planted.end());
    EXPECT_EQ(named, planted);
    EXPECT_EQ(direction.nodes[0].dof, "uy");
    EXPECT_NE(direction.explanation.find("along y"), std::string::npos) << direction.explanation;
  }
}

TEST(NegativeLink, OfABarWithTheWrongSignIsNamedWithItsDirection) {
  PlantedModel model;  // a square frame of bars with two diagonals, one of which has the wrong sign
  model.place = {{1, {0, 0, 0}}, {2, {2, 0, 0}}, {3, {2, 0, 2}}, {4, {0, 0, 2}}};
  const std::vector<std::string> dofs{"ux", "uz"};
  for (const std::int64_t node : {3, 4}) {
    for (const std::string& name : dofs) model.add_dof(node, name);
  }
  PlantedModel space = model;  // add_bar takes ux, uy, uz in order; uy is not there
  const std::vector<std::string> all{"ux", "uy", "uz"};
  for (const auto& [from, to, stiffness] :
       std::vector<std::tuple<int, int, double>>{{2, 3, 1e8}, {1, 4, 1e8}, {1, 3, 1e8}, {3, 4, -5e8}})
    add_bar(space, from, to, stiffness, all);
  const Outcome outcome = located(space);
  EXPECT_EQ(outcome.check->inertia.negative, 1);
  ASSERT_EQ(outcome.located->directions.size(), 1U) << summary(outcome);
  EXPECT_EQ(outcome.located->directions[0].cause, Cause::kNegativeSpring);
  EXPECT_NE(outcome.located->directions[0].explanation.find("along x"), std::string::npos)
      << summary(outcome);
}

/// On its constraints: the negative pivots that multipliers bring along are not directions of the structure.
TEST(OnConstraints, NegativeSpringIsFoundAtItsDof) {
  for (const Fault fault : {Fault::kNone, Fault::kRepeatedTie}) {
    PlantedModel model;
    model.append(specimen_with("saddle", 3000, fault), 0, 0);
    std::int64_t node = 0;  // the node furthest along, on the tied half
    double most = -1;
    for (const auto& [number, p] : model.place) {
      const bool has = std::find(model.node.begin(), model.node.end(), number) != model.node.end();
      if (has && p[0] + 0.01 * p[2] > most && p[0] < 7) most = p[0] + 0.01 * p[2], node = number;
    }
    const Index at = model.equation(node, "uy");
    model.entries.push_back({at, at, -6 * model.diagonal(at)});
    const auto renamed = model.shuffle(23);
    const Outcome outcome = located(model);
    ASSERT_TRUE(outcome.check->constrained && outcome.check->constrained->inertia);
    EXPECT_EQ(outcome.check->constrained->inertia->negative, 1);
    const auto found = of_cause(outcome, Cause::kNegativeSpring);
    ASSERT_EQ(found.size(), 1U) << summary(outcome);
    EXPECT_EQ(found[0].nodes.at(0).node, renamed.at(node));
    EXPECT_EQ(found[0].nodes.at(0).dof, "uy");
    EXPECT_LT(found[0].energy, 0);
    EXPECT_EQ(outcome.located->negative, 1);
    EXPECT_EQ(of_cause(outcome, Cause::kUnresolved).size(), 0U) << summary(outcome);
    EXPECT_EQ(of_cause(outcome, Cause::kRedundantConstraint).size(), fault == Fault::kNone ? 0U : 1U);
    EXPECT_NE(outcome.located->accuracy_note.find("multipliers"), std::string::npos);
  }
}

/// A motion that would be negative but for a constraint is none: K = diag(-1, 1, 1), u_1 held by a
/// multiplier.
TEST(OnConstraints, WhatAConstraintHoldsIsNotNegative) {
  PlantedModel model;
  for (const char* name : {"ux", "uy", "uz", "multiplier"}) model.add_dof(1, name);
  model.entries = {{0, 0, -1}, {1, 1, 1}, {2, 2, 1}, {3, 0, 1}};
  const Outcome held = located(model, true, false);
  EXPECT_EQ(held.check->constrained->inertia->negative, 0);
  EXPECT_TRUE(held.located->directions.empty()) << summary(held);
  model.entries = {{0, 0, 1}, {1, 1, -1}, {2, 2, 1}, {3, 0, 1}};
  const Outcome open = located(model, true, false);
  EXPECT_EQ(open.check->constrained->inertia->negative, 1);
  ASSERT_EQ(open.located->directions.size(), 1U) << summary(open);
  EXPECT_EQ(open.located->directions[0].nodes.at(0).dof, "uy");
  EXPECT_EQ(open.located->directions[0].energy, -1);
}

/// Unit springs in a row without supports: held at equation h, the flexibility of equation i is |i - h|.
TEST(LocalAccuracy, OfAFreeChainIsThatOfTheChainHeld) {
  constexpr Index n = 24;
  PlantedModel model;
  for (Index k = 0; k < n; ++k) {
    model.place[k + 1] = {1.0 * k, 0, 0};
    model.add_dof(k + 1, "ux");
  }
  for (Index k = 0; k + 1 < n; ++k) model.add_link(k + 1, k + 2, "ux", 1);
  const Outcome outcome = located(model);
  ASSERT_TRUE(outcome.located->accuracy) << outcome.located->accuracy_note;
  const LocalAccuracy& accuracy = *outcome.located->accuracy;
  EXPECT_EQ(accuracy.held_directions, 1);
  ASSERT_EQ(accuracy.held.size(), 1U);
  EXPECT_EQ(accuracy.equations, n);
  const double held = static_cast<double>(*accuracy.held[0].node);
  double off = 0;
  for (const DofShare& worst : accuracy.worst) {
    const double i = static_cast<double>(*worst.node), own = i == 1 || i == n ? 1 : 2;
    if (i == held) continue;
    const double exact = std::log10(own * std::fabs(i - held));
    EXPECT_NEAR(worst.share, exact, 0.5) << i;
    off += (worst.share - exact) / static_cast<double>(accuracy.worst.size());
  }
  EXPECT_NEAR(off, 0, 0.25);
}

TEST(LocalAccuracy, IsGivenForSoundPartsBesideNegativeOnes) {
  PlantedModel model;
  const Specimen sound = specimen_with("solid", 600, Fault::kNone);
  model.append(sound, 0, 0);
  model.append(specimen_with("solid", 600, Fault::kNegativeSpring), 10000, 20);
  model.append(specimen_with("frame", 600, Fault::kLoosePart), 20000, 40);
  const Index with_negative = sound.stiffness.rows;
  const Outcome outcome = located(model);
  ASSERT_TRUE(outcome.located->accuracy);
  EXPECT_EQ(outcome.located->accuracy->equations, model.rows() - with_negative);
  EXPECT_EQ(outcome.located->accuracy->held_directions, 6);
  EXPECT_NE(outcome.located->accuracy_note.find("negative directions"), std::string::npos);
  EXPECT_LT(outcome.located->accuracy->largest, 8);
  // Alone, the sound block has the same figures: other parts do not enter.
  PlantedModel alone;
  alone.append(sound, 0, 0);
  const Outcome single = located(alone);
  EXPECT_EQ(single.located->accuracy_note, "");
  EXPECT_NEAR(single.located->accuracy->largest, std::min(outcome.located->accuracy->largest, 3.0), 2);
}

}  // namespace
}  // namespace stanchion
