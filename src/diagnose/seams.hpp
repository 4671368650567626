// Nodes at one place that share no stiffness: the classical seam that was never merged.
#pragma once

#include <string>
#include <utility>
#include <vector>

#include "diagnose/structure.hpp"
#include "sparse/matrix_family.hpp"

namespace stanchion {

struct Seams {
  std::vector<std::pair<Index, Index>> pairs;  ///< nodes of the structure, the smaller first, ascending

  /// "Nodes 12 and 840 lie at one place and are not connected (and 7 more such pairs)" for pairs with a node
  /// in `nodes` (ascending); empty when there is none.
  std::string in_words(const Structure& structure, const std::vector<Index>& nodes) const;
};

/// Places count as one within 1e-9 of the model's size. Cost: a hash of the places and one pass over the
/// entries of the nodes concerned.
Seams find_seams(const Structure& structure, const ShiftedMatrix& matrix);

}  // namespace stanchion
