// Ranking: which equations carry a motion, and what a drawing shows of it.
#pragma once

#include <vector>

#include "diagnose/local_vectors.hpp"
#include "diagnose/structure.hpp"
#include "stanchion/located.hpp"

namespace stanchion {

/// Shares a_ii y_i^2 (y_i^2 where a_ii = 0) over their sum, by local row, averaged over the vectors.
std::vector<double> row_shares(const Structure& structure, const LocalVectors& motion);

/// The largest first, at most `most`; ties by equation.
std::vector<DofShare> ranked(const Structure& structure, const std::vector<Index>& rows,
                             const std::vector<double>& share, std::size_t most);

/// The fewest nodes that hold `part` of the whole.
Index nodes_holding(const LocalVectors& motion, const std::vector<double>& share, double part);

/// Translations of the nodes in global directions, the largest 1, by the numbers of `picture_node`; empty
/// when there are none.
std::vector<std::array<float, 3>> shape_of(const Structure& structure, const Buffer<double>& scale,
                                           const LocalVectors& motion, std::size_t vector,
                                           const std::vector<Index>& picture_node,
                                           std::size_t nodes_in_picture);

}  // namespace stanchion
