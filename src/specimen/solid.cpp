// A concrete block of bricks, clamped at one face.
#include <algorithm>

#include "specimen/block_mesh.hpp"
#include "specimen/faults.hpp"
#include "specimen/models.hpp"

namespace stanchion::specimen {
namespace {

constexpr double kWidth = 4;  // m

/// The last quarter of the block: where the loose part and the hinge are.
Index cut_plane(const BlockMesh& mesh) {
  return mesh.nx - std::max<Index>(1, mesh.nx / 4);
}

/// Gives the end of the block its own nodes; with `hinged`, it stays joined along the lower edge of the cut.
std::vector<Index> cut_end_off(Model& model, const BlockMesh& mesh, bool hinged) {
  const double cut_x = cut_plane(mesh) * mesh.length / mesh.nx;
  const double half_brick = mesh.height / mesh.nz / 2;
  return detach(
      model, [&](const Part& part, Offset e) { return centre_of(model, part, e).x > cut_x; },
      [&](Index node) { return hinged && model.table.place(node).z < half_brick; });
}

void plant(Model& model, const BlockMesh& mesh, const SpecimenOptions& options) {
  if (options.fault == Fault::kLoosePart || options.fault == Fault::kHinge) {
    cut_end_off(model, mesh, options.fault == Fault::kHinge);
  }
  if (options.fault == Fault::kSoftSpring) {
    const double stiffness = options.softness * kConcrete.youngs_modulus * mesh.width / mesh.ny;
    hold_softly(model, cut_end_off(model, mesh, false), stiffness);
  }
}

/// The block bends like a cantilever, upwards at its free end.
std::array<double, 6> cantilever_bending(const Point& p) {
  const double length = 2 * kWidth, r = p.x / length;
  const double slope = (6 * r - 3 * r * r) / (2 * length);
  return {-(p.z - kWidth / 2) * slope, 0, (3 * r * r - r * r * r) / 2, 0, 0, 0};
}

ExpectedInertia expected_inertia(const Specimen& specimen, Fault fault) {
  if (fault == Fault::kHinge) {
    return inertia_of(specimen, 0, 1,
                      "the end of the block is joined along one straight edge only and turns about it");
  }
  return inertia_in_space(
      specimen, fault,
      {.sound = "an elastic body with one face clamped",
       .free = "an elastic body without supports has its six rigid motions",
       .loose = "the end of the block shares no node with the rest: six rigid motions of its own",
       .softly_held = "the loose end is held by",
       .motion = "a bending motion"});
}

}  // namespace

Result<Specimen> make_solid(Offset unknowns, const SpecimenOptions& options) {
  const BlockMesh mesh = mesh_for(unknowns, kWidth);
  Model model;
  add_block(model, mesh, kConcrete, options.mass);
  if (options.fault != Fault::kFree) {
    for (Index node = 0; node < mesh.layer(); ++node) model.table.strike(node, kDisplacements);
  }
  plant(model, mesh, options);
  Specimen specimen = finish(std::move(model));
  if (options.fault == Fault::kNegativeSpring) add_negative_spring(specimen, cantilever_bending);
  specimen.name = "solid";
  specimen.scenario = "Concrete guide block of a lock entrance, 8 x 4 x 4 m, clamped at x = 0; " +
                      std::to_string(mesh.nx) + " x " + std::to_string(mesh.ny) + " x " +
                      std::to_string(mesh.nz) + " bricks of 8 nodes.";
  specimen.expected.inertia = expected_inertia(specimen, options.fault);
  return specimen;
}

}  // namespace stanchion::specimen
