// Planting defects of known consequence.
#pragma once

#include <array>
#include <functional>
#include <string>
#include <vector>

#include "specimen/model.hpp"

namespace stanchion::specimen {

/// True for the elements that are to come loose.
using ElementChoice = std::function<bool(const Part& part, Offset element)>;

/// Gives the chosen elements their own copies of the nodes that they share with the others, except the nodes
/// for which `kept` says true. Returns the copies. The part is then loose, but for the kept nodes.
std::vector<Index> detach(
    Model& model, const ElementChoice& chosen,
    const std::function<bool(Index node)>& kept = [](Index) { return false; });

/// The centre of an element's nodes.
Point centre_of(const Model& model, const Part& part, Offset element);

/// Holds ux, uy and uz of the given nodes with springs of `stiffness` each.
void hold_softly(Model& model, const std::vector<Index>& nodes, double stiffness);

/// Displacements ux uy uz rx ry rz of a smooth trial motion at a place.
using TrialMotion = std::function<std::array<double, 6>(const Point&)>;

/// Adds one negative spring at the unknown where `motion` is largest among the displacements: minus twice
/// x^T K x / x_i^2, with x the trial motion. x then has negative energy, and a change of rank one moves at
/// most one eigenvalue across zero: K, positive definite before, has exactly one negative eigenvalue and no
/// zero.
void add_negative_spring(Specimen& specimen, const TrialMotion& motion);

/// What makes a specimen definite, and what each fault that it offers does, in the words of `expected`.
struct FaultWords {
  std::string sound, free, loose;
  std::string softly_held = "";  ///< "the loose end is held by"
  std::string motion = "";       ///< the trial motion of the negative spring: "a half wave"
};

/// Of a body or structure in space: sound, six rigid motions free, six of a part that is loose or held very
/// softly, or one negative spring. A hinge is the caller's own.
ExpectedInertia inertia_in_space(const Specimen& specimen, Fault fault, const FaultWords& words);

/// `n` eigenvalues, of which `negative` and `zero`; the rest positive.
ExpectedInertia inertia_of(const Specimen& specimen, Index negative, Index zero, std::string why);

}  // namespace stanchion::specimen
