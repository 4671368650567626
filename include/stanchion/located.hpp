// Where and why a matrix has zero, negative or weak directions: plain data, part of an outcome.
#pragma once

#include <array>
#include <cstdint>
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include "stanchion/types.hpp"

namespace stanchion {

/// The kinds of fault that a direction is named by.
enum class Cause {
  kUnresolved,           ///< sign or membership is not certain: no cause is named
  kLoosePart,            ///< a part that can move as a rigid body
  kMechanism,            ///< a hinge, a pinned chain, a pattern of elements without resistance
  kUnattachedDof,        ///< an equation without any stiffness
  kMissingRotation,      ///< rotations that nothing resists, node by node
  kNegativeSpring,       ///< one spring to the ground of negative stiffness
  kNegativePatch,        ///< a few nodes whose elements give way
  kUnstableWhole,        ///< the reference state is past a critical load
  kRedundantConstraint,  ///< a constraint that repeats others
  kNearMechanism,        ///< positive, but weak
  kOverStiffCoupling,    ///< rows whose size swamps their neighbours
};

/// One equation's part in a direction.
struct DofShare {
  std::optional<std::int64_t> node;  ///< absent: no dof map, or none for this equation
  std::string dof;                   ///< "ux", ...; "equation 17" without a dof map
  Index equation = 0;                ///< as in the files, from 1
  double share = 0;                  ///< k_ii x_i^2 over its sum, or x_i^2 where k_ii = 0
};

/// One cause: a direction, or several that belong together (the rigid motions of one part).
struct Direction {
  Cause cause = Cause::kUnresolved;
  int sign = 0;                    ///< -1 negative, 0 zero at the resolution, 1 positive
  Index count = 1;                 ///< directions it stands for
  double energy = 0;               ///< x^T K x / x^T diag(K) x; the one largest in size of `count`
  std::optional<double> residual;  ///< || A_s y || of the scaled matrix, y a unit vector (zero directions)
  std::vector<DofShare> nodes;     ///< ranked, the largest first; the first few
  Index moving_rows = 0, moving_nodes = 0;  ///< all that take part
  std::optional<Index> component;           ///< index into `components`
  std::vector<std::string> motions;
  std::string explanation, remedy;
  std::vector<std::array<float, 3>>
      shape;  ///< by node of the picture: how it moves, the largest 1; may be empty
};

/// Mass of a model by direction, and its centre.
struct MassTotals {
  std::array<double, 3> mass{};
  std::optional<std::array<double, 3>> centre;
};

/// A connected part. Nodes that share a stiffness, and equations of one node, belong together.
struct ComponentRecord {
  Index rows = 0, nodes = 0;
  Index nullity = 0;                                  ///< zero directions found in it
  std::optional<std::array<double, 6>> rigid_energy;  ///< of its six rigid motions (x y z, turns about x y z)
};

/// How well double precision holds the model: log10 of k_ii (K^-1)_ii.
struct LocalAccuracy {
  std::string method;
  Index vectors = 0;
  double attention = 8, alarm = 12;  ///< levels, in digits
  double typical = 0, largest = 0;   ///< median and maximum
  std::vector<std::pair<double, Index>>
      histogram;                ///< lower edge in digits, equations; bins half a digit wide
  std::vector<DofShare> worst;  ///< share holds the digits
  std::vector<float> by_node;   ///< the picture's nodes, -1 where there is no figure; may be empty
  Index equations = 0;          ///< that have a figure
  Index held_directions = 0;    ///< zero directions held for it
  std::vector<DofShare> held;   ///< the equations where, the first few
};

/// What there is to draw.
struct Picture {
  std::vector<std::int64_t> node;
  std::vector<std::array<double, 3>> place;
  std::vector<std::pair<Index, Index>> links;  ///< pairs of nodes with stiffness between them
  std::vector<Index> component;                ///< of each node; -1 for none
};

struct LocateOutcome {
  std::vector<Direction> directions;  ///< the gravest first
  std::vector<ComponentRecord> components;
  Index components_left_out = 0;
  Index negative = 0, zero = 0;  ///< that the inertia states
  Index not_located = 0;         ///< of those, without an entry above
  double weak_below = 0;         ///< energy ratio that counts as weak
  std::optional<MassTotals> mass;
  std::optional<LocalAccuracy> accuracy;
  std::string accuracy_note;  ///< what has no figure, or was held for it, and why; may be empty
  Picture picture;
  double seconds = 0;  ///< of locating, beyond the factorizations
};

}  // namespace stanchion
