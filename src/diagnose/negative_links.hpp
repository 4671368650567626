// Springs between two nodes that push apart, where the entries show them.
#pragma once

#include <array>
#include <utility>
#include <vector>

#include "diagnose/kept_factor.hpp"
#include "diagnose/structure.hpp"
#include "diagnose/subspace.hpp"

namespace stanchion {

/// A spring or bar between two nodes: stiffness times the square of what they move apart along `direction`.
struct NegativeLink {
  Index node[2] = {-1, -1};
  bool turns = false;                 ///< between rotations
  std::array<double, 3> direction{};  ///< unit vector, in global directions (the dofs' own without axes)
  std::vector<std::pair<Index, double>> apart;  ///< positions with signs and cosines: how far apart, unscaled
  double stiffness = 0;                         ///< negative, in the unit of K
  bool decisive = false;                        ///< taking it away takes exactly one negative direction away
  bool essential = false;  ///< or would leave nothing that holds the motion; with its sign turned it is gone

  /// The square of what a scaled motion moves them apart, times the stiffness, without its sign.
  double energy(const ShiftedMatrix& matrix, const Columns& x, Index column) const;
};

/// Pairs of nodes whose coupling is that of one such spring and nothing else: between their translations (or
/// their rotations) a symmetric block of rank one whose sign is that of a negative stiffness. Of those the
/// ones that hold most energy in `x` (`vectors` columns) are tried with the factor. Pairs with nodal axes are
/// left out. Cost: two passes over the entries, one solve.
std::vector<NegativeLink> find_negative_links(const Structure& structure, const ShiftedMatrix& matrix,
                                              const Columns& x, const std::vector<double>& value,
                                              KeptFactor& factor);

}  // namespace stanchion
