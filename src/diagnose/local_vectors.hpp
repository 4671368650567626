// A few vectors on the rows of some nodes only: what the causes are made of.
#pragma once

#include <cstddef>
#include <span>
#include <vector>

#include "diagnose/columns.hpp"
#include "diagnose/structure.hpp"

namespace stanchion {

/// Scaled motions of `nodes`; everything else is at rest.
struct LocalVectors {
  std::vector<Index> nodes;        ///< ascending
  std::vector<Index> rows;         ///< positions, by node
  std::vector<std::size_t> first;  ///< node -> its first row; one more at the end
  std::size_t count = 0;           ///< vectors
  std::vector<double> value;       ///< rows x count, row by row

  const double* row(std::size_t i) const { return value.data() + i * count; }
};

/// The given columns of x on the nodes' rows.
LocalVectors gather(const Structure& structure, std::vector<Index> nodes, const Columns& x,
                    std::span<const Index> columns);

/// Combinations with the given coefficient vectors.
LocalVectors combined(const LocalVectors& local, const std::vector<std::vector<double>>& coefficients);

/// The same vectors on fewer nodes (a subset, ascending).
LocalVectors restricted(const LocalVectors& local, const std::vector<Index>& nodes);

/// Squared amplitude of every node.
std::vector<double> node_energy(const LocalVectors& local);

/// The nodes whose amplitude is above `active` of the largest.
std::vector<Index> moving_nodes(const LocalVectors& local, double active);

/// Gram-Schmidt, twice; vectors that depend on earlier ones are dropped.
void orthonormalise(LocalVectors& local);

}  // namespace stanchion
