// The axial forces of a simply supported Pratt truss under equal loads on its lower joints, by sections.
#pragma once

#include <vector>

#include "stanchion/types.hpp"

namespace stanchion::specimen {

/// Lower joints 0 to panels, upper joints 1 to panels - 1 straight above them; end posts from the lower
/// corners to the first and last upper joints; a vertical at each upper joint; in each inner panel one
/// diagonal that falls towards midspan. Loads act at the lower joints 1 to panels - 1.
struct PrattTruss {
  Index panels = 4;       ///< even, at least 4
  double panel = 3;       ///< m
  double height = 2;      ///< m
  double joint_load = 1;  ///< N, downwards

  bool left(Index panel_number) const { return panel_number < panels / 2; }
};

/// A joint of the truss.
struct TrussJoint {
  Index number = 0;
  bool upper = false;
};

enum class TrussRole { kLowerChord, kUpperChord, kEndPost, kVertical, kDiagonal };

struct TrussMember {
  TrussRole role = TrussRole::kLowerChord;
  TrussJoint start, end;
  double axial_force = 0;  ///< N, tension positive
};

/// All members with their forces: exact equilibrium of the pin-jointed truss.
std::vector<TrussMember> members_of(const PrattTruss& truss);

}  // namespace stanchion::specimen
