// What stands behind the positions of a factored matrix: nodes, dofs, places, connected parts.
#pragma once

#include <array>
#include <cstdint>
#include <span>
#include <string>
#include <vector>

#include "io/dof_map.hpp"
#include "io/node_table.hpp"
#include "sparse/matrix_family.hpp"
#include "symbolic/analysis.hpp"

namespace stanchion {

enum class DofKind : std::uint8_t { kUx, kUy, kUz, kRx, kRy, kRz, kMultiplier, kOther };

inline bool is_translation(DofKind kind) {
  return kind <= DofKind::kUz;
}
inline bool is_rotation(DofKind kind) {
  return kind >= DofKind::kRx && kind <= DofKind::kRz;
}

/// What is known of a model beside its numbers; members may be null. The dof map is numbered like the matrix
/// analysed.
struct ModelNames {
  const DofMap* dofs = nullptr;
  const NodeTable* nodes = nullptr;
  const AxesTable* axes = nullptr;
  const std::vector<Index>* original = nullptr;  ///< equation in the files of every equation; null: the same
  const std::vector<Index>* multipliers = nullptr;  ///< equations
};

/// By position in elimination order. Without a dof map every equation is a node of its own.
struct Structure {
  Index rows = 0, nodes = 0, parts = 0;
  bool named = false;                        ///< there is a dof map
  bool placed = false;                       ///< most nodes have a place
  std::vector<Index> node_of;                ///< position -> node
  std::vector<DofKind> kind;                 ///< position
  std::vector<Index> equation;               ///< position -> equation analysed
  std::vector<Index> first_row;              ///< node -> start in rows_of_node; nodes + 1
  std::vector<Index> rows_of_node;           ///< positions, by node
  std::vector<NodeNumber> number;            ///< node -> number in the model, kNoNode without
  std::vector<std::array<double, 3>> place;  ///< node; empty unless placed
  std::vector<char> has_place;
  std::vector<const std::array<double, 9>*> axes;  ///< node; null: global directions
  std::vector<Index> part_of;  ///< node -> connected part, the part with the lowest equation first
  std::vector<Index> part_rows, part_nodes;
  std::vector<Index> first_of_part;  ///< part -> start in rows_of_part; parts + 1
  std::vector<Index> rows_of_part;   ///< positions, by part, ascending
  std::vector<double> diagonal;      ///< scaled a_ii, by position
  std::vector<char> empty;           ///< position: no entry but zeros
  const ModelNames* names = nullptr;

  std::span<const Index> rows_of(Index node) const {
    const auto a = static_cast<std::size_t>(node);
    return std::span(rows_of_node)
        .subspan(static_cast<std::size_t>(first_row[a]),
                 static_cast<std::size_t>(first_row[a + 1] - first_row[a]));
  }
  std::span<const Index> part(Index number_of_part) const {
    const auto p = static_cast<std::size_t>(number_of_part);
    return std::span(rows_of_part)
        .subspan(static_cast<std::size_t>(first_of_part[p]),
                 static_cast<std::size_t>(first_of_part[p + 1] - first_of_part[p]));
  }

  /// "node 4411, ux", or "equation 17".
  std::string describe(Index position) const;
  /// "ux"; "equation 17" without a dof map.
  std::string dof_name(Index position) const;
  /// Equation in the files, from 1.
  Index file_equation(Index position) const;
};

/// `matrix` without its offset. Cost: a few passes over the entries. `names` outlives the result.
Structure describe_structure(const Analysis& analysis, const ShiftedMatrix& matrix, const ModelNames& names);

/// Disjoint sets with path halving; a root is the least member (Tarjan and van Leeuwen, J. ACM 31 (1984)).
class DisjointSets {
 public:
  explicit DisjointSets(Index members);
  Index root(Index member);
  void join(Index a, Index b);

 private:
  std::vector<Index> parent_;
};

}  // namespace stanchion
