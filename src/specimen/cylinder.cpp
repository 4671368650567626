// A thin steel cylinder under axial compression, of flat facets around its whole circumference.
#include <algorithm>
#include <cmath>
#include <memory>
#include <numbers>
#include <utility>

#include "specimen/facet_shell.hpp"
#include "specimen/faults.hpp"
#include "specimen/models.hpp"

namespace stanchion::specimen {
namespace {

constexpr double kRadius = 1.5, kThickness = 0.025;  // m
constexpr double kReferenceForce = 1e6;              // N/m of circumference

struct CylinderMesh {
  Index along = 3;   ///< facets along the axis; at least 3, so that a patch can lie inside
  Index around = 6;  ///< facets around; the nodes lie on the middle surface
  double length = 1;

  Rectangle facet() const {
    return {length / along, 2 * kRadius * std::sin(std::numbers::pi / around), kThickness};
  }
  double angle(double j) const { return 2 * std::numbers::pi * j / around; }
  Index node(Index i, Index j) const { return i * around + j % around; }
};

/// Facets as nearly square as may be; both ends together lack the unknowns of one ring of nodes.
CylinderMesh mesh_for(Offset unknowns, double aspect) {
  const double facets = static_cast<double>(unknowns) / 6;
  CylinderMesh mesh;
  mesh.length = aspect * kRadius;
  const double around = std::sqrt(facets * 2 * std::numbers::pi / aspect);
  mesh.around = std::max<Index>(6, static_cast<Index>(std::lround(around)));
  mesh.along = std::max<Index>(3, static_cast<Index>(std::lround(facets / mesh.around)));
  return mesh;
}

/// One matrix for every strip of facets along the axis.
Fill turned_by_strip(const CylinderMesh& mesh, const ElementMatrix<24>& own) {
  auto strips = std::make_shared<std::vector<ElementMatrix<24>>>();
  for (Index j = 0; j < mesh.around; ++j) {
    strips->push_back(turned_about_x(own, mesh.angle(j + 0.5) + std::numbers::pi / 2));
  }
  return [strips, around = mesh.around](Offset e, std::span<double> out) {
    const ElementMatrix<24>& matrix = (*strips)[static_cast<std::size_t>(e % around)];
    std::copy(matrix.entry.begin(), matrix.entry.end(), out.begin());
  };
}

/// K, G and M couple these in a facet of any angle about x, its own axes being mixed but for x.
struct Couplings {
  Coupling stiffness = full_coupling(kAllSix), geometric{}, mass{};

  Couplings() {
    const auto ux = static_cast<std::size_t>(Dof::kUx), rx = static_cast<std::size_t>(Dof::kRx);
    stiffness[ux] &= static_cast<DofSet>(~dof_bit(Dof::kRx));
    stiffness[rx] &= static_cast<DofSet>(~dof_bit(Dof::kUx));
    geometric = full_coupling(static_cast<DofSet>(kAllSix & ~dof_bit(Dof::kUx)));
    mass = geometric;
    mass[ux] = dof_bit(Dof::kUx);
  }
};

void add_facets(Model& model, const CylinderMesh& mesh, MassKind mass) {
  for (Index i = 0; i <= mesh.along; ++i) {
    for (Index j = 0; j < mesh.around; ++j) {
      const double angle = mesh.angle(j);
      model.table.add_node(
          {i * mesh.length / mesh.along, kRadius * std::cos(angle), kRadius * std::sin(angle)}, kAllSix);
    }
  }
  Part part{4, kAllSix, {}, {}, {}, {}};
  for (Index i = 0; i < mesh.along; ++i) {
    for (Index j = 0; j < mesh.around; ++j) {
      for (const Index node :
           {mesh.node(i, j), mesh.node(i + 1, j), mesh.node(i + 1, j + 1), mesh.node(i, j + 1)}) {
        part.nodes.push_back(node);
      }
    }
  }
  const Rectangle shape = mesh.facet();
  const Couplings couplings;
  part.stiffness = PartMatrix{couplings.stiffness, turned_by_strip(mesh, facet_stiffness(shape, kSteel))};
  part.geometric =
      PartMatrix{couplings.geometric, turned_by_strip(mesh, facet_geometric(shape, -kReferenceForce))};
  if (mass == MassKind::kConsistent) {
    part.mass = PartMatrix{couplings.mass, turned_by_strip(mesh, facet_mass(shape, kSteel))};
  } else {
    Coupling diagonal{};  // the same in all axes
    for (std::size_t c = 0; c < 3; ++c) diagonal[c] = static_cast<DofSet>(1U << c);
    part.mass = PartMatrix{diagonal, same_for_all(facet_lumped_mass(shape, kSteel))};
  }
  model.parts.push_back(std::move(part));
}

/// Classical simple supports: the ends stay circles in their planes, free to turn about them and to move
/// along the axis. Holding ux of one node takes the rigid motion along the axis away and nothing else: it
/// meets neither strain nor G.
void support(Model& model, const CylinderMesh& mesh) {
  for (Index j = 0; j < mesh.around; ++j) {
    for (const Index i : {Index{0}, mesh.along}) {
      model.table.strike(mesh.node(i, j), dof_bit(Dof::kUy) | dof_bit(Dof::kUz) | dof_bit(Dof::kRx));
    }
  }
  model.table.strike(mesh.node(0, 0), dof_bit(Dof::kUx));
}

/// A patch inside the wall gets its own nodes.
std::vector<Index> cut_patch_out(Model& model, const CylinderMesh& mesh) {
  const Index i0 = mesh.along / 3, i1 = std::max(i0 + 1, 2 * mesh.along / 3);
  const Index j0 = mesh.around / 3, j1 = std::max(j0 + 1, mesh.around / 2);
  return detach(model, [=, around = mesh.around](const Part&, Offset e) {
    const auto i = static_cast<Index>(e / around), j = static_cast<Index>(e % around);
    return i >= i0 && i < i1 && j >= j0 && j < j1;
  });
}

/// The wall bulges in a half wave along the axis, the same all around.
TrialMotion bulge(const CylinderMesh& mesh) {
  const double a = std::numbers::pi / mesh.length;
  return [a](const Point& p) -> std::array<double, 6> {
    const double y = p.y / kRadius, z = p.z / kRadius;
    const double out = std::sin(a * p.x), slope = a * std::cos(a * p.x);
    return {0, out * y, out * z, 0, -slope * z, slope * y};
  };
}

ExpectedInertia expected_inertia(const Specimen& specimen, Fault fault) {
  return inertia_in_space(
      specimen, fault,
      {.sound = "a cylinder whose ends stay circles, one of its nodes held along the axis",
       .free = "a cylinder without supports has its six rigid motions",
       .loose = "a patch of the wall shares no node with the rest: six rigid motions of its own",
       .softly_held = "the loose patch is held by",
       .motion = "a bulge"});
}

}  // namespace

Result<Specimen> make_cylinder(Offset unknowns, const SpecimenOptions& options) {
  const CylinderMesh mesh = mesh_for(unknowns, options.aspect);
  Model model;
  add_facets(model, mesh, options.mass);
  if (options.fault != Fault::kFree) support(model, mesh);
  if (options.fault == Fault::kLoosePart) cut_patch_out(model, mesh);
  if (options.fault == Fault::kSoftSpring) {
    const double bending = kSteel.youngs_modulus * std::pow(kThickness, 3) / std::pow(mesh.facet().width, 2);
    hold_softly(model, cut_patch_out(model, mesh), options.softness * bending);
  }
  Specimen specimen = finish(std::move(model));
  if (options.fault == Fault::kNegativeSpring) add_negative_spring(specimen, bulge(mesh));
  specimen.name = "cylinder";
  specimen.scenario = "Steel leg of a mooring dolphin, " + std::to_string(mesh.along) + " x " +
                      std::to_string(mesh.around) +
                      " facets, 3 m across, wall 25 mm, under 1 MN/m along its axis.";
  specimen.expected.inertia = expected_inertia(specimen, options.fault);
  return specimen;
}

}  // namespace stanchion::specimen
