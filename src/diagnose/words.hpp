// What each cause is called, what it means and what usually mends it: plain words for an engineer.
#pragma once

#include <string>
#include <vector>

#include "stanchion/located.hpp"

namespace stanchion {

/// What the sentences are made of.
struct CauseFacts {
  Cause cause = Cause::kUnresolved;
  Index count = 1, nodes = 0;
  bool whole_part = false, only_part = true;  ///< the part moves as a whole; it is all there is
  bool rigid = false, separated = true, placed = false, named = true, by_connectivity = false;
  std::string place;               ///< "node 12, ux"
  std::string dof;                 ///< "uz", for unattached dofs
  std::string other_place, along;  ///< a spring's other node and its direction; empty: to the ground
  bool essential = false;          ///< the spring: without it nothing holds the motion
  bool follow = false;             ///< constraints: each from several others together
  bool chain = false;              ///< as many motions as joints, or nearly
  bool pattern = false;            ///< neighbouring nodes move against each other
  bool across_bars = false;        ///< an unattached displacement of a node that has stiffness along others
  bool displacements = true;       ///< some of the dofs are displacements or rotations
  std::vector<std::string> motions;
  std::string seam;   ///< "nodes 12 and 840 lie at one place", when there is such a pair
  std::string hangs;  ///< "node 12", "nodes 12, 13 and 6 more": at rest beside what moves; may be empty
  double energy = 0, stiffness = 0, digits = 0;
  bool felt = true;  ///< the stiffness is that of a spring; otherwise twice the entry, which is negative
  std::string unresolved_because;
  bool resolution_given = false;  ///< by whoever asked
};

std::string explanation_of(const CauseFacts& facts);
std::string remedy_of(const CauseFacts& facts);

}  // namespace stanchion
