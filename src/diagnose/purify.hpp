// From vectors that span what is zero (or weak) in one part to causes that stand apart.
#pragma once

#include <utility>
#include <vector>

#include "diagnose/local_vectors.hpp"
#include "diagnose/rigid_motion.hpp"
#include "diagnose/structure.hpp"

namespace stanchion {

/// Vectors of one place, one cause: orthonormal.
struct Bundle {
  Index part = 0;
  std::vector<Index> nodes;  ///< that move, ascending
  LocalVectors x;            ///< scaled motions
  RigidFit rigid;            ///< when the vectors are rigid motions of their nodes; no motions otherwise
  bool whole_part = false;   ///< rigid for all of the part
  bool chain = false;        ///< put together of overlapping motions, about as many as nodes
  bool separated = true;     ///< false: several causes may be mixed in here
};

struct PurifyOptions {
  double active = 1e-6;  ///< amplitude, over the largest, from which a node counts as moving
  double rigid = 1e-4;   ///< relative distance that still counts as rigid
};

/// Splits the columns of every part in `wanted`: rigid motions of the whole part first;
/// then clusters of moving nodes that do not touch; then, within a cluster, the vectors with the fewest
/// moving nodes (iteratively reweighted least squares; Daubechies, DeVore, Fornasier, Gunturk, Comm. Pure
/// Appl. Math. 63 (2010)), and of those the ones that move together as one rigid body. Bundles together span
/// what went in.
std::vector<Bundle> purify(const Structure& structure, const ShiftedMatrix& matrix, const Columns& x,
                           const std::vector<std::pair<Index, std::vector<Index>>>& wanted,
                           const PurifyOptions& options);

}  // namespace stanchion
