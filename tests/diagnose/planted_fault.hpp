// A specimen with one fault of its own, and what must come out for it: kind, count, and every node that
// moves.
#pragma once

#include <algorithm>
#include <iterator>
#include <set>
#include <sstream>
#include <string>
#include <utility>
#include <vector>

#include "diagnose/planted.hpp"

namespace stanchion::test {

/// What must come out for one part, in node numbers from before any shuffling.
struct ExpectedCause {
  Cause cause;
  Index count;
  std::vector<std::int64_t> moves;  ///< all nodes that take part, ascending; or the one with the spring
  std::string dof = {};             ///< of that spring, whose node is ranked first; others may follow it
  bool seam = false;                ///< the words name a pair of nodes at one place

  ExpectedCause after(std::int64_t base) const {
    ExpectedCause moved = *this;
    for (std::int64_t& node : moved.moves) node += base;
    return moved;
  }
};

struct PlantedFault {
  Specimen specimen;
  std::vector<ExpectedCause> expected;  ///< one, or none for a sound model
};

inline bool knows_fault(const std::string& name, Fault fault) {
  for (const SpecimenEntry& entry : specimen_list()) {
    if (name != entry.name) continue;
    std::istringstream words(entry.faults);
    return std::any_of(std::istream_iterator<std::string>(words), {},
                       [&](const std::string& word) { return *fault_from(word) == fault; });
  }
  return false;
}

inline bool is_multiplier(const SpecimenDof& d) {
  return std::string(specimen::dof_name(d.dof)) == "multiplier";
}

/// The nodes that stiffness connects to those numbered above `sound_nodes`: the copies that a cut has made.
inline std::vector<std::int64_t> connected_to_copies(const Specimen& cut, std::size_t sound_nodes) {
  std::vector<Index> root(cut.nodes.size() + 1);
  std::iota(root.begin(), root.end(), 0);
  const auto find = [&](Index node) {
    while (root[static_cast<std::size_t>(node)] != node) {
      root[static_cast<std::size_t>(node)] =
          root[static_cast<std::size_t>(root[static_cast<std::size_t>(node)])];
      node = root[static_cast<std::size_t>(node)];
    }
    return node;
  };
  const SymmetricMatrix& k = cut.stiffness;
  const auto node_of = [&](Index row) { return cut.dofs[static_cast<std::size_t>(row)].node; };
  for (Index j = 0; j < k.rows; ++j) {
    for (Offset e = k.column_start[j]; e < k.column_start[Offset{j} + 1]; ++e) {
      if (k.value[e] != 0) root[static_cast<std::size_t>(find(node_of(k.row[e])))] = find(node_of(j));
    }
  }
  const Index loose = find(static_cast<Index>(sound_nodes) + 1);
  std::set<std::int64_t> moving;
  for (const SpecimenDof& d : cut.dofs) {
    if (find(d.node) == loose) moving.insert(d.node);
  }
  return {moving.begin(), moving.end()};
}

/// The nodes with equations that `chosen` takes, by their number and place.
template <class Choice>
std::vector<std::int64_t> nodes_where(const Specimen& specimen, const Choice& chosen) {
  std::set<std::int64_t> nodes;
  for (const SpecimenDof& d : specimen.dofs) {
    if (!is_multiplier(d) && chosen(d.node, specimen.nodes[static_cast<std::size_t>(d.node) - 1]))
      nodes.insert(d.node);
  }
  return {nodes.begin(), nodes.end()};
}

/// Which nodes a hinge lets move: the end of the block beyond the cut with its copies; the floors above the
/// storey whose columns are pinned at both ends.
inline std::vector<std::int64_t> moved_by_hinge(const std::string& name, const Specimen& hinged,
                                                std::size_t sound_nodes) {
  if (name == "frame") {
    const double top = std::max_element(hinged.nodes.begin(), hinged.nodes.end(), [](auto& a, auto& b) {
                         return a.z < b.z;
                       })->z;
    const auto storeys = std::lround(top / 3.6), pinned = storeys / 2;
    const double above = (static_cast<double>(pinned) + 0.5) * 3.6;
    return nodes_where(hinged, [&](Index, const specimen::Point& p) { return p.z > above; });
  }
  const double cut = hinged.nodes.back().x;
  return nodes_where(hinged, [&](Index node, const specimen::Point& p) {
    return static_cast<std::size_t>(node) > sound_nodes || p.x > cut + 1e-9;
  });
}

/// The multipliers of ties given twice: the ties come first, then those that repeat the first of them, then
/// the one that keeps a face level.
inline std::vector<std::int64_t> repeated_multipliers(const Specimen& tied, std::size_t repeated) {
  const std::vector<Index>& all = tied.multipliers;
  std::vector<std::int64_t> nodes;
  for (std::size_t k = 0; k < repeated; ++k) {
    for (const std::size_t at : {k, all.size() - 1 - repeated + k})
      nodes.push_back(tied.dofs[static_cast<std::size_t>(all[at])].node);
  }
  std::sort(nodes.begin(), nodes.end());
  return nodes;
}

/// The one equation in which the diagonals differ.
inline SpecimenDof pushed_dof(const Specimen& sound, const Specimen& pushed) {
  const SymmetricMatrix &a = sound.stiffness, &b = pushed.stiffness;
  std::vector<SpecimenDof> found;
  for (Index j = 0; j < a.rows; ++j) {
    if (a.value[a.column_start[j]] != b.value[b.column_start[j]])
      found.push_back(pushed.dofs[static_cast<std::size_t>(j)]);
  }
  EXPECT_EQ(found.size(), 1U);
  return found.at(0);
}

inline PlantedFault plant_fault(const std::string& name, Offset unknowns, Fault fault) {
  PlantedFault made{specimen_with(name, unknowns, fault), {}};
  if (fault == Fault::kNone) return made;
  const Specimen sound = specimen_with(name, unknowns, Fault::kNone);
  const auto cut = [&] { return connected_to_copies(made.specimen, sound.nodes.size()); };
  const auto expect = [&](ExpectedCause expected) { made.expected.push_back(std::move(expected)); };
  switch (fault) {
    case Fault::kFree: {
      // In a plane a body has three motions, a field of temperatures or the like one; a multiplier of the
      // saddle keeps one face level.
      const Index motions = name == "column" ? 3 : name == "laplace" ? 1 : name == "saddle" ? 5 : 6;
      expect({Cause::kLoosePart, motions,
              nodes_where(made.specimen, [](Index, const specimen::Point&) { return true; })});
      break;
    }
    case Fault::kLoosePart:
      expect({Cause::kLoosePart, 6, cut(), {}, true});
      break;
    case Fault::kHinge: {
      // A storey on hinges sways two ways and twists; a block on one edge turns.
      const bool storey = name == "frame";
      expect({storey ? Cause::kLoosePart : Cause::kMechanism, storey ? 3 : 1,
              moved_by_hinge(name, made.specimen, sound.nodes.size())});
      break;
    }
    case Fault::kSoftSpring:
      expect({Cause::kNearMechanism, 6, cut()});
      break;
    case Fault::kNegativeSpring: {
      const SpecimenDof at = pushed_dof(sound, made.specimen);
      expect({Cause::kNegativeSpring, 1, {at.node}, specimen::dof_name(at.dof)});
      break;
    }
    case Fault::kRepeatedTie: {
      const std::size_t repeated = made.specimen.multipliers.size() - sound.multipliers.size();
      expect({Cause::kRedundantConstraint, static_cast<Index>(repeated),
              repeated_multipliers(made.specimen, repeated)});
      break;
    }
    default:
      break;
  }
  return made;
}

/// One entry for every defect, of its kind, with its count and nodes; nothing else is named.
inline void expect_planted(const std::vector<ExpectedCause>& planted,
                           const std::map<std::int64_t, std::int64_t>& number_before,
                           const Outcome& outcome) {
  ASSERT_TRUE(outcome.located);
  EXPECT_EQ(outcome.located->not_located, 0);
  const auto& directions = outcome.located->directions;
  EXPECT_EQ(directions.size(), planted.size()) << summary(outcome);
  for (const ExpectedCause& expected : planted) {
    const auto takes_part = [&](std::int64_t node) {
      return std::binary_search(expected.moves.begin(), expected.moves.end(), number_before.at(node));
    };
    const auto inside = [&](const DofShare& share) { return share.node && takes_part(*share.node); };
    const auto found = std::find_if(directions.begin(), directions.end(), [&](const Direction& d) {
      return d.cause == expected.cause && !d.nodes.empty() && inside(d.nodes.front());
    });
    if (found == directions.end()) {
      ADD_FAILURE() << "cause " << static_cast<int>(expected.cause) << " at " << expected.moves.size()
                    << " nodes from " << expected.moves.at(0) << " was not found\n"
                    << summary(outcome);
      continue;
    }
    SCOPED_TRACE(found->explanation);
    EXPECT_EQ(found->count, expected.count);
    if (!expected.dof.empty()) {
      EXPECT_EQ(found->nodes[0].dof, expected.dof);
      continue;
    }
    EXPECT_EQ(found->moving_nodes, static_cast<Index>(expected.moves.size()));
    EXPECT_TRUE(std::all_of(found->nodes.begin(), found->nodes.end(), inside));
    // Of a motion that is drawn every node is known, not only those ranked first.
    const auto& drawn = outcome.located->picture.node;
    for (std::size_t n = 0; n < found->shape.size(); ++n) {
      if (found->shape[n] == std::array<float, 3>{} || takes_part(drawn[n])) continue;
      ADD_FAILURE() << "node " << number_before.at(drawn[n]) << " before shuffling moves, but is at rest";
      break;
    }
    if (expected.seam) {
      EXPECT_NE(found->explanation.find("lie at one place"), std::string::npos);
    }
  }
}

}  // namespace stanchion::test
