// What the six rigid motions of every part and single equations say about springs to the ground and
// couplings.
#pragma once

#include <vector>

#include "diagnose/kept_factor.hpp"
#include "diagnose/structure.hpp"
#include "diagnose/subspace.hpp"
#include "stanchion/located.hpp"

namespace stanchion {

/// Columns 0 to 5: translations and turns of every part about its own centre, in scaled coordinates, and A_s
/// times them.
struct RigidProbe {
  bool turns = false;  ///< places are known: all six; otherwise the translations
  Columns motion, force;
};
RigidProbe probe_rigid_motions(const Structure& structure, const ShiftedMatrix& matrix, ThreadPool& pool);

/// Energy x^T K x / x^T diag(K) x of the six motions, by part; a motion that shows on no row has energy 0.
std::vector<std::array<double, 6>> rigid_energies(const Structure& structure, const RigidProbe& probe);

/// A spring to the ground of negative stiffness: the diagonal entry is negative and those of its neighbours
/// are not; or, under a translation of everything its equation alone, among those it touches, feels a force,
/// and one that pushes along.
struct NegativeSpring {
  Index row = 0;         ///< position
  double stiffness = 0;  ///< negative, in the unit of K; see `felt`
  bool felt = false;     ///< by a translation: the stiffness is the spring's. Otherwise it is twice the entry
  bool decisive = false;  ///< taking it away takes exactly one negative direction away (one solve shows it)
};
std::vector<NegativeSpring> find_negative_springs(const Structure& structure, const ShiftedMatrix& matrix,
                                                  const RigidProbe& probe, KeptFactor& factor);

/// Equations coupled so stiffly that what else they feel drowns: the digits that the coupling costs.
struct StiffCoupling {
  Index row = 0, other = -1;  ///< positions; other -1: against all its neighbours
  double digits = 0;
};
/// Couplings that cost at least `digits` digits, the worst first: pairs of dofs of one kind whose common
/// motion is that much softer than their difference, and diagonals that exceed those of their neighbours of
/// the same kind as much.
std::vector<StiffCoupling> find_stiff_couplings(const Structure& structure, const ShiftedMatrix& matrix,
                                                double digits);

}  // namespace stanchion
