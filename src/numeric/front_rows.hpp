// Which rows a front holds and where a child's rows go: the same for every scalar.
#pragma once

#include <vector>

#include "base/buffer.hpp"
#include "symbolic/assembly_tree.hpp"

namespace stanchion {

/// The rows of one front: its own pivots, then columns delayed by its children, then the rows below.
struct FrontRows {
  Index front = 0;
  Index own = 0;         ///< pivots of this front's own
  Index candidates = 0;  ///< own + delayed from the children
  Index order = 0;
};

/// Lists the positions of the rows of `front` in `label`, and sets local_of[position] to the row of each.
/// `waiting`: per front, with the positions its `delayed` columns have.
template <class Waiting>
FrontRows list_rows(const AssemblyTree& tree, Index front, const std::vector<Waiting>& waiting,
                    std::vector<Index>& label, Buffer<Index>& local_of) {
  FrontRows rows{front, tree.pivots(front), 0, 0};
  label.clear();
  for (Index k = tree.first_column[front]; k < tree.first_column[Offset{front} + 1]; ++k) label.push_back(k);
  for (const Index child : tree.children(front)) {
    const auto& delayed = waiting[static_cast<std::size_t>(child)].delayed;
    label.insert(label.end(), delayed.begin(), delayed.end());
  }
  rows.candidates = static_cast<Index>(label.size());
  label.insert(label.end(), tree.rows_below.begin() + tree.row_start[front],
               tree.rows_below.begin() + tree.row_start[Offset{front} + 1]);
  rows.order = static_cast<Index>(label.size());
  for (Index i = 0; i < rows.order; ++i) local_of[label[static_cast<std::size_t>(i)]] = i;
  return rows;
}

/// map[i] = row of the front, as local_of gives it, for row i of the contribution block of `child`: its
/// `delayed` columns come first.
inline void map_child_rows(const AssemblyTree& tree, Index child, const std::vector<Index>& delayed,
                           const Buffer<Index>& local_of, std::vector<Index>& map) {
  map.clear();
  for (const Index position : delayed) map.push_back(local_of[position]);
  for (Offset k = tree.row_start[child]; k < tree.row_start[Offset{child} + 1]; ++k) {
    map.push_back(local_of[tree.rows_below[k]]);
  }
}

}  // namespace stanchion
