// Two blocks of bricks tied by Lagrange multipliers, and a constraint over many unknowns: a saddle point
// matrix.
#include <algorithm>

#include "specimen/block_mesh.hpp"
#include "specimen/constraint.hpp"
#include "specimen/faults.hpp"
#include "specimen/models.hpp"

namespace stanchion::specimen {
namespace {

constexpr double kWidth = 4;  // m
constexpr std::array kDirections{Dof::kUx, Dof::kUy, Dof::kUz};

struct SaddleMesh {
  BlockMesh fixed, tied;  ///< the clamped half and the half that hangs on it
  Index first_tied = 0;   ///< first node of the tied half
};

SaddleMesh mesh_for_halves(Offset unknowns) {
  BlockMesh whole = mesh_for(unknowns, kWidth);
  // Two layers more than the whole block: the doubled interface and its multipliers.
  whole.nx = std::max<Index>(2, whole.nx - 2);
  SaddleMesh mesh{whole, whole, 0};
  mesh.fixed.nx = whole.nx / 2;
  mesh.tied.nx = whole.nx - mesh.fixed.nx;
  mesh.fixed.length = whole.length * mesh.fixed.nx / whole.nx;
  mesh.tied.length = whole.length - mesh.fixed.length;
  mesh.tied.start_x = mesh.fixed.length;
  return mesh;
}

/// u(fixed) - u(tied) = 0 for every direction of every pair of nodes at the joint.
std::vector<Constraint> ties(const Model& model, const SaddleMesh& mesh) {
  std::vector<Constraint> constraints;
  for (Index k = 0; k < mesh.fixed.layer(); ++k) {
    const Index a = mesh.fixed.nx * mesh.fixed.layer() + k, b = mesh.first_tied + k;
    for (const Dof dof : kDirections) {
      constraints.push_back({model.table.place(a), {{a, dof, 1}, {b, dof, -1}}});
    }
  }
  return constraints;
}

/// The sum of uz over the far face is zero: the block is kept level by a jack.
Constraint level_face(const Model& model, const SaddleMesh& mesh) {
  Constraint constraint;
  for (Index k = 0; k < mesh.tied.layer(); ++k) {
    const Index node = mesh.first_tied + mesh.tied.nx * mesh.tied.layer() + k;
    constraint.place = model.table.place(node);
    constraint.terms.push_back({node, Dof::kUz, 1});
  }
  return constraint;
}

void expect(Specimen& specimen, Fault fault, Index redundant) {
  const auto multipliers = static_cast<Index>(specimen.multipliers.size());
  const Index rank = multipliers - redundant, rows = specimen.stiffness.rows;
  const Index zero = fault == Fault::kFree ? 5 : 0;
  std::string why = "K is definite on the constraints, whose rank is " + std::to_string(rank) + " of " +
                    std::to_string(multipliers) + ": one negative eigenvalue for each independent constraint";
  if (redundant > 0) why += ", one zero for each repeated one";
  if (zero > 0)
    why += "; without the clamp, five of the six rigid motions keep the far face level and remain";
  specimen.expected.inertia = inertia_of(specimen, rank, redundant + zero, why);
  specimen.expected.constrained =
      ExpectedConstrained{multipliers, rank, redundant, 0, zero, rows - multipliers - rank - zero};
}

}  // namespace

Result<Specimen> make_saddle(Offset unknowns, const SpecimenOptions& options) {
  SaddleMesh mesh = mesh_for_halves(unknowns);
  Model model;
  add_block(model, mesh.fixed, kConcrete, options.mass);
  mesh.first_tied = add_block(model, mesh.tied, kConcrete, options.mass);
  if (options.fault != Fault::kFree) {
    for (Index node = 0; node < mesh.fixed.layer(); ++node) model.table.strike(node, kDisplacements);
  }
  std::vector<Constraint> constraints = ties(model, mesh);
  const auto tied = static_cast<Index>(constraints.size());
  const Index repeated = options.fault == Fault::kRepeatedTie ? std::max<Index>(1, tied / 20) : 0;
  for (Index k = 0; k < repeated; ++k)
    constraints.push_back(Constraint(constraints[static_cast<std::size_t>(k)]));
  constraints.push_back(level_face(model, mesh));
  add_constraints(model, constraints);
  Specimen specimen = finish(std::move(model));
  specimen.name = "saddle";
  specimen.scenario = "Concrete lock sill cast in two halves of " + std::to_string(mesh.fixed.nx) + " and " +
                      std::to_string(mesh.tied.nx) + " layers of bricks, tied at the joint by " +
                      std::to_string(tied + repeated) +
                      " multipliers; one more keeps the far face level on average.";
  expect(specimen, options.fault, repeated);
  return specimen;
}

}  // namespace stanchion::specimen
