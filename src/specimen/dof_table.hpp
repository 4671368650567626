// Which unknowns each node has, and the equation number of each.
#pragma once

#include <bit>
#include <cstdint>
#include <vector>

#include "specimen/material.hpp"
#include "stanchion/types.hpp"

namespace stanchion::specimen {

/// The unknowns a node may have, in the order in which its equations are numbered. A multiplier is a node of
/// its own with this one unknown; a temperature occurs only in scalar models.
enum class Dof : std::uint8_t { kUx, kUy, kUz, kRx, kRy, kRz, kMultiplier, kTemperature };
inline constexpr int kDofKinds = 8;

/// The name in dofs.csv: ux uy uz rx ry rz multiplier t.
const char* dof_name(Dof dof);

/// A set of Dof, one bit each.
using DofSet = std::uint8_t;
inline constexpr DofSet dof_bit(Dof dof) {
  return static_cast<DofSet>(1U << static_cast<unsigned>(dof));
}
inline constexpr DofSet kDisplacements = 0b111, kRotations = 0b111000, kAllSix = 0b111111;
inline constexpr DofSet kMultiplierOnly = 0b1000000;

/// Nodes with coordinates and unknowns. Equations follow the node order, and within a node the order of Dof.
class DofTable {
 public:
  /// Adds a node with the unknowns of `dofs`; its number is returned.
  Index add_node(const Point& place, DofSet dofs);

  /// Removes unknowns of a node (a support). Only before number().
  void strike(Index node, DofSet dofs) { set_[static_cast<std::size_t>(node)] &= static_cast<DofSet>(~dofs); }

  /// Numbers the equations; call once, after the last change.
  void number();

  /// The equation of an unknown, or -1 when the node does not have it (or it is struck).
  Index equation(Index node, int dof) const {
    const DofSet set = set_[static_cast<std::size_t>(node)];
    if ((set >> dof & 1U) == 0) return -1;
    return first_[static_cast<std::size_t>(node)] +
           std::popcount(static_cast<unsigned>(set & ((1U << dof) - 1U)));
  }

  DofSet dofs(Index node) const { return set_[static_cast<std::size_t>(node)]; }
  const Point& place(Index node) const { return place_[static_cast<std::size_t>(node)]; }
  Index nodes() const { return static_cast<Index>(set_.size()); }
  Index equations() const { return equations_; }

 private:
  std::vector<Point> place_;
  std::vector<DofSet> set_;
  std::vector<Index> first_;
  Index equations_ = 0;
};

}  // namespace stanchion::specimen
