// Beams or bars between nodes of a model, each with its axial force, as one part.
#pragma once

#include <vector>

#include "specimen/beam.hpp"
#include "specimen/model.hpp"

namespace stanchion::specimen {

struct PlacedMember {
  Index start = 0, end = 0;  ///< nodes
  Member line;
  double axial_force = 0;  ///< N under the reference load, tension positive
};

/// What the members of one part have in common.
struct MemberKind {
  Material material;
  Section section;
  bool pinned = false;  ///< bars, which turn freely at both ends
  MassKind mass = MassKind::kConsistent;
};

/// Stiffness and mass of all members; geometric stiffness when any axial force is not zero. Pairs of unknowns
/// that no member couples (those of members along an axis) get no entries.
Part member_part(std::vector<PlacedMember> members, const MemberKind& kind);

}  // namespace stanchion::specimen
