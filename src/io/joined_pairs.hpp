// Which of some pairs of nodes are joined: by stiffness between them, or by a constraint that acts on both.
#pragma once

#include <cstddef>
#include <set>
#include <utility>
#include <vector>

#include "stanchion/types.hpp"

namespace stanchion {

/// Told the entries of a matrix one by one, in any order. Pairs are sorted, the smaller index first.
/// Not thread-safe. Cost: a search among the pairs for each entry between two nodes of some pair.
class JoinedPairs {
 public:
  JoinedPairs(const std::vector<std::pair<std::size_t, std::size_t>>& pairs, std::size_t nodes);

  /// Only entries of such nodes matter.
  bool concerns(std::size_t node) const { return concerned_[node] != 0; }
  /// There is stiffness between two nodes that concern.
  void add_stiffness(std::size_t a, std::size_t b);
  /// A multiplier acts on a node that concerns.
  void add_constraint(Index multiplier, std::size_t node);
  /// The pairs without either.
  std::vector<std::pair<std::size_t, std::size_t>> apart();

 private:
  const std::vector<std::pair<std::size_t, std::size_t>>& pairs_;
  std::vector<char> concerned_;
  std::set<std::pair<std::size_t, std::size_t>> stiff_;
  std::vector<std::pair<std::size_t, Index>> acting_;  ///< node, multiplier
};

}  // namespace stanchion
