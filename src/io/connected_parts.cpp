#include "io/connected_parts.hpp"

#include <numeric>
#include <unordered_map>

namespace stanchion {
namespace {

/// Disjoint sets with path halving (R. E. Tarjan, J. van Leeuwen, J. ACM 31, 1984); a root is the least row
/// of its set, so that parts come out in row order.
class Sets {
 public:
  explicit Sets(Index rows) : parent_(static_cast<std::size_t>(rows)) {
    std::iota(parent_.begin(), parent_.end(), 0);
  }

  Index root(Index row) {
    while (at(row) != row) row = at(row) = at(at(row));
    return row;
  }

  void join(Index a, Index b) {
    a = root(a);
    b = root(b);
    if (a < b) {
      at(b) = a;
    } else {
      at(a) = b;
    }
  }

 private:
  Index& at(Index row) { return parent_[static_cast<std::size_t>(row)]; }
  std::vector<Index> parent_;
};

void join_nodes(Sets& sets, const std::vector<char>& alone, const DofMap& dofs) {
  std::unordered_map<NodeNumber, Index> first_of_node;
  for (Index row = 0; row < dofs.equations(); ++row) {
    if (alone[static_cast<std::size_t>(row)] != 0 || dofs.node(row) == kNoNode) continue;
    const auto [at, added] = first_of_node.try_emplace(dofs.node(row), row);
    if (!added) sets.join(at->second, row);
  }
}

}  // namespace

ConnectedParts find_parts(const SymmetricMatrix& matrix, const std::vector<char>& alone, const DofMap* dofs) {
  constexpr std::size_t kPartsShown = 5;
  Sets sets(matrix.rows);
  for (Index column = 0; column < matrix.rows; ++column) {
    Index mine = sets.root(column);
    for (Offset k = matrix.column_start[column]; k < matrix.column_start[Offset{column} + 1]; ++k) {
      const Index row = matrix.row[k];
      if (row == column || matrix.value[k] == 0) continue;
      sets.join(mine, row);
      mine = sets.root(mine);
    }
  }
  if (dofs != nullptr && dofs->equations() == matrix.rows) join_nodes(sets, alone, *dofs);
  ConnectedParts parts;
  std::vector<Index> size(static_cast<std::size_t>(matrix.rows), 0);
  parts.part_of_row.assign(static_cast<std::size_t>(matrix.rows), -1);
  for (Index row = 0; row < matrix.rows; ++row) {
    if (alone[static_cast<std::size_t>(row)] != 0) continue;
    const Index root = sets.root(row);  // the least row of its part: numbered before the others
    parts.part_of_row[static_cast<std::size_t>(row)] =
        root == row ? parts.count : parts.part_of_row[static_cast<std::size_t>(root)];
    if (size[static_cast<std::size_t>(root)]++ > 0) continue;
    ++parts.count;
    if (parts.first_rows.size() < kPartsShown) parts.first_rows.push_back(row);
  }
  for (const Index row : parts.first_rows)
    parts.sizes.push_back(size[static_cast<std::size_t>(sets.root(row))]);
  return parts;
}

}  // namespace stanchion
