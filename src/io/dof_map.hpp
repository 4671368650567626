// Which node and which degree of freedom stands behind each equation.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <string_view>
#include <unordered_map>
#include <vector>

#include "stanchion/status.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

/// Node numbers as the user's model has them; kNoNode for equations that belong to none (some multipliers).
using NodeNumber = std::int64_t;
inline constexpr NodeNumber kNoNode = -1;

/// One node and dof for each equation of a matrix, from a `--dofs` file or a node-keyed matrix.
/// Example: "1,7,ux / 2,7,rz / 3,,multiplier" gives node = 7 7 -1, and names ux, rz, multiplier.
class DofMap {
 public:
  Index equations() const { return static_cast<Index>(node_.size()); }
  NodeNumber node(Index equation) const { return node_[static_cast<std::size_t>(equation)]; }

  /// The dof's name: ux uy uz rx ry rz p t multiplier held, or the file's own text.
  const std::string& dof(Index equation) const { return names_[name_[static_cast<std::size_t>(equation)]]; }

  bool is_multiplier(Index equation) const {
    return name_[static_cast<std::size_t>(equation)] == kMultiplier;
  }
  bool is_held(Index equation) const { return name_[static_cast<std::size_t>(equation)] == kHeld; }

  /// Equation of a node's dof, or nothing. Builds an index on first use: not thread-safe before
  /// `build_index`.
  std::optional<Index> find(NodeNumber node, std::string_view dof) const;
  void build_index() const;

  /// "node 12, ux"; "multiplier" without a node.
  std::string describe(Index equation) const;

  /// Equations with dof "held" / "multiplier", ascending.
  std::vector<Index> held() const;
  std::vector<Index> multipliers() const;

  /// Appends the next equation. Names are compared without regard to case for the ten known ones.
  void append(NodeNumber node, std::string_view dof);

  /// Map of a reduced matrix: equation i is equation `original[i]` of this map.
  DofMap subset(const std::vector<Index>& original) const;

  DofMap();

 private:
  static constexpr std::uint32_t kMultiplier = 8, kHeld = 9;
  std::uint32_t intern(std::string_view dof);
  std::vector<Index> with_name(std::uint32_t name) const;

  std::vector<NodeNumber> node_;
  std::vector<std::uint32_t> name_;
  std::vector<std::string> names_;
  std::unordered_map<std::string, std::uint32_t> number_of_name_;
  mutable std::unordered_multimap<NodeNumber, Index> equations_of_node_;
  mutable Index indexed_ = 0;
};

/// "row 3, column 2", and with a map of the matrix " (node 12, ux with node 7, rz)"; for messages. `dofs` may
/// be null or, while its size is still to be checked, too short.
std::string entry_name(Index row, Index column, const DofMap* dofs);

/// Reads a `--dofs` file: CSV `equation,node,dof`, header line optional, equations 1 to n each exactly once
/// in any order; node may be empty for multipliers. Plain or .gz. Errors (kBadInput, with file:line): those
/// of reading CSV, "missing-field", "bad-number", "index-out-of-range", "duplicate-equation",
/// "missing-equation". Two equations with one node and dof are a warning ("duplicate-dof") in `warnings`.
Result<DofMap> read_dof_map(const std::string& path, Warnings& warnings);

/// Writes `map` as CSV with header line; the file appears whole or not at all.
Status write_dof_map(const DofMap& map, const std::string& path);

}  // namespace stanchion
