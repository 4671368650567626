// All that can be planted in one kind of model, at once: each in a part of its own, numbered anew, equations
// permuted.
#pragma once

#include <algorithm>
#include <iterator>
#include <map>
#include <sstream>
#include <string>
#include <vector>

#include "diagnose/planted.hpp"

namespace stanchion::test {

/// What must come out for one part.
struct Expected {
  Cause cause;
  Index count;
  std::int64_t first, last;                ///< all nodes named lie between, in the numbers before shuffling
  std::vector<std::int64_t> exactly = {};  ///< or are these, when given
  std::string dof = {};                    ///< of the node ranked first, when given
  bool seam = false;                       ///< the words name a pair of nodes at one place
};

struct Combination {
  PlantedModel model;
  std::vector<Expected> expected;
  std::map<std::int64_t, std::int64_t> back;  ///< new number -> number before
};

inline bool knows_fault(const std::string& name, const std::string& fault) {
  for (const SpecimenEntry& entry : specimen_list()) {
    if (name != entry.name) continue;
    std::istringstream faults(entry.faults);
    return std::find(std::istream_iterator<std::string>(faults), {}, fault) !=
           std::istream_iterator<std::string>();
  }
  return false;
}

/// How far numbers are off those of a drawing; what is zero stays so at the resolution.
struct Jitter {
  double place = 1e-9;  ///< of every coordinate, absolute
  double entry = 0;     ///< of every entry, relative
};

/// How many ties a fault adds.
inline Index added_ties(const std::string& name, Offset unknowns, Fault fault) {
  const auto ties = [&](Fault with) {
    const Specimen specimen = specimen_with(name, unknowns, with);
    return std::count_if(specimen.dofs.begin(), specimen.dofs.end(), [](const SpecimenDof& d) {
      return std::string(specimen::dof_name(d.dof)) == "multiplier";
    });
  };
  return static_cast<Index>(ties(fault) - ties(Fault::kNone));
}

/// Loose part, hinge, soft springs, a negative spring, repeated ties, rotations without stiffness: those that
/// the specimen knows, the others by hand. Parts of about `unknowns` equations each.
inline Combination combination_of(const std::string& name, Offset unknowns, unsigned seed,
                                  const Jitter& jitter = {}) {
  constexpr std::int64_t kStep = 1000000;
  Combination made;
  PlantedModel& model = made.model;
  std::int64_t base = 0;
  const auto append = [&](Fault fault) {
    base += kStep;
    model.append(specimen_with(name, unknowns, fault), base, 100.0 * static_cast<double>(base) / kStep);
  };
  append(Fault::kNone);
  // A spring that pushes along at a node in the middle of the numbering; the part was definite, so it alone
  // decides.
  const std::string along = name == "laplace" ? "t" : "uz";
  std::vector<std::int64_t> having;
  for (Index e = 0; e < model.rows(); ++e) {
    if (model.dof[static_cast<std::size_t>(e)] == along)
      having.push_back(model.node[static_cast<std::size_t>(e)]);
  }
  const std::int64_t pushed = having.at(having.size() / 2);
  const Index at = model.equation(pushed, along);
  model.entries.push_back({at, at, -4 * model.diagonal(at)});
  made.expected.push_back({Cause::kNegativeSpring, 1, base, base + kStep, {pushed}, along});
  if (knows_fault(name, "loose-part")) {
    append(Fault::kLoosePart);
    made.expected.push_back({Cause::kLoosePart, 6, base, base + kStep, {}, {}, true});
  } else {
    // In a plane a body has three motions, a field of temperatures or the like one; a multiplier of the
    // saddle keeps one face level.
    append(Fault::kFree);
    made.expected.push_back({Cause::kLoosePart,
                             name == "column"    ? 3
                             : name == "laplace" ? 1
                                                 : 5,
                             base, base + kStep});
  }
  if (knows_fault(name, "repeated-tie")) {
    append(Fault::kRepeatedTie);
    made.expected.push_back(
        {Cause::kRedundantConstraint, added_ties(name, unknowns, Fault::kRepeatedTie), base, base + kStep});
  }
  if (knows_fault(name, "hinge")) {
    append(Fault::kHinge);
    // A storey on hinges sways two ways and twists; a block on one edge turns.
    const bool storey = name == "frame";
    made.expected.push_back(
        {storey ? Cause::kLoosePart : Cause::kMechanism, storey ? 3 : 1, base, base + kStep});
  }
  if (knows_fault(name, "soft-spring")) {
    append(Fault::kSoftSpring);
    made.expected.push_back({Cause::kNearMechanism, 6, base, base + kStep});
  }
  // Nodes of a block of bricks with rotations that nothing resists.
  base += kStep;
  model.append(specimen_with("solid", 500, Fault::kNone), base, 100.0 * static_cast<double>(base) / kStep);
  std::vector<std::int64_t> turning;
  for (std::int64_t k = 0; k < 7; ++k) {
    turning.push_back(base + 50 + 3 * k);
    model.add_dof(turning.back(), k % 2 == 0 ? "rx" : "rz");
  }
  made.expected.push_back({Cause::kMissingRotation, 7, base, base + kStep, turning});
  for (const auto& [before, after] : model.shuffle(seed)) made.back[after] = before;
  // Places that are not those of a drawing: each coordinate a little off, but seams stay seams.
  std::map<std::array<double, 3>, std::array<double, 3>> jittered;
  std::mt19937 random(seed);
  std::uniform_real_distribution<double> off(-1, 1);
  for (Triplet& entry : model.entries) entry.value *= 1 + jitter.entry * off(random);
  for (auto& [node, p] : model.place) {
    auto [where, fresh] = jittered.try_emplace(p, p);
    if (fresh) {
      for (double& c : where->second) c += jitter.place * off(random);
    }
    p = where->second;
  }
  return made;
}

/// Every planted defect is an entry of its kind, with its count and nodes; nothing else is named.
inline void expect_planted(const Combination& made, const Outcome& outcome) {
  ASSERT_TRUE(outcome.located);
  EXPECT_EQ(outcome.located->not_located, 0);
  const auto& directions = outcome.located->directions;
  EXPECT_EQ(directions.size(), made.expected.size()) << summary(outcome);
  for (const Expected& expected : made.expected) {
    const auto before = [&](const DofShare& share) { return made.back.at(share.node.value_or(-1)); };
    const auto inside = [&](const DofShare& share) {
      return share.node && before(share) > expected.first && before(share) < expected.last;
    };
    const auto found = std::find_if(directions.begin(), directions.end(), [&](const Direction& d) {
      return d.cause == expected.cause && !d.nodes.empty() && inside(d.nodes.front());
    });
    if (found == directions.end()) {
      ADD_FAILURE() << "cause " << static_cast<int>(expected.cause) << " between " << expected.first
                    << " and " << expected.last << " was not found\n"
                    << summary(outcome);
      continue;
    }
    EXPECT_EQ(found->count, expected.count) << found->explanation;
    EXPECT_TRUE(std::all_of(found->nodes.begin(), found->nodes.end(), inside)) << found->explanation;
    if (!expected.dof.empty()) {
      EXPECT_EQ(found->nodes[0].dof, expected.dof);
      EXPECT_EQ(before(found->nodes[0]), expected.exactly.at(0));
    } else if (!expected.exactly.empty()) {
      std::vector<std::int64_t> nodes;
      for (const DofShare& share : found->nodes) nodes.push_back(before(share));
      std::sort(nodes.begin(), nodes.end());
      EXPECT_EQ(nodes, expected.exactly);
    }
    if (expected.seam) {
      EXPECT_NE(found->explanation.find("lie at one place"), std::string::npos) << found->explanation;
    }
  }
}

}  // namespace stanchion::test
