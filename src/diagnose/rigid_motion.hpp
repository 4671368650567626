// The six rigid motions of some nodes, and how far given motions are among them.
#pragma once

#include <array>
#include <string>
#include <vector>

#include "diagnose/local_vectors.hpp"
#include "diagnose/structure.hpp"

namespace stanchion {

/// Translation t and turn w about `centre`: u(r) = t + w x (r - centre).
struct RigidMotion {
  std::array<double, 3> t{}, w{};
};

/// Rigid motions contained in a span of vectors.
struct RigidFit {
  std::array<double, 3> centre{};
  double radius = 1;                            ///< root mean square distance from it
  std::vector<RigidMotion> motions;             ///< that the span contains
  std::vector<std::vector<double>> of_columns;  ///< each as coefficients of the columns, unit length
  Index possible = 0;                           ///< independent rigid motions that these rows can show at all
};

/// Of the orthonormal vectors `local` those combinations that are rigid to `tolerance` (of the length). With
/// places all six are tried, with nodal axes where there are some; without places translations only. `scale`:
/// the scaling of the matrix, by position. Turns need the places of all nodes.
RigidFit fit_rigid_motions(const Structure& structure, const LocalVectors& local, const Buffer<double>& scale,
                           double tolerance);

/// "translation x", "rotation about an axis parallel to z through (1, 2, 3)", ... one for each motion, the
/// span turned so that plain directions come out where the span holds them.
std::vector<std::string> motions_in_words(const RigidFit& fit);

/// "x" where a unit vector lies along an axis, else "(0.6, 0.8, 0)".
std::string direction_in_words(const std::array<double, 3>& unit);

/// Displacement or turn of the dof at `position` in a rigid motion; 0 for other dofs. Nodal axes are
/// honoured.
double rigid_value(const Structure& structure, Index position, const std::array<double, 3>& centre,
                   const RigidMotion& motion);

}  // namespace stanchion
