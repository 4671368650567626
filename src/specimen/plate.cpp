// A thin steel plate in its own plane's compression or shear.
#include <algorithm>
#include <cmath>
#include <numbers>

#include "specimen/closed_form.hpp"
#include "specimen/faults.hpp"
#include "specimen/flat_shell.hpp"
#include "specimen/models.hpp"

namespace stanchion::specimen {
namespace {

constexpr DofSet kFive = 0b11111, kMembrane = 0b11, kBending = 0b11100;
constexpr double kWidth = 2.0, kThickness = 0.010;  // m
constexpr double kReferenceForce = 100e3;           // N/m

struct PlateMesh {
  Index nx = 3, ny = 3;  ///< at least 3, so that a patch can lie inside
  double length = 1, width = kWidth;

  Rectangle element() const { return {length / nx, width / ny, kThickness}; }
  Index node(Index i, Index j) const { return i * (ny + 1) + j; }
};

PlateMesh mesh_for(Offset unknowns, double aspect) {
  const double target = static_cast<double>(unknowns);
  PlateMesh mesh;
  mesh.ny = std::max<Index>(3, static_cast<Index>(std::lround(std::sqrt(target / (5 * aspect)))));
  mesh.nx = std::max<Index>(3, static_cast<Index>(std::lround(target / (5.0 * mesh.ny))));
  mesh.length = aspect * mesh.width;
  return mesh;
}

/// Reference forces, tension positive; the shear is positive.
MembraneForce reference_force(PlateLoad load) {
  switch (load) {
    case PlateLoad::kBiaxial:
      return {-kReferenceForce, -kReferenceForce, 0};
    case PlateLoad::kShear:
      return {0, 0, kReferenceForce};
    default:
      return {-kReferenceForce, 0, 0};
  }
}

Coupling shell_coupling(double offset) {
  if (offset != 0) return full_coupling(kFive);
  Coupling coupling = full_coupling(kMembrane);
  const Coupling bending = full_coupling(kBending);
  for (std::size_t c = 0; c < kDofKinds; ++c) coupling[c] |= bending[c];
  return coupling;
}

void add_elements(Model& model, const PlateMesh& mesh, const SpecimenOptions& options) {
  for (Index i = 0; i <= mesh.nx; ++i) {
    for (Index j = 0; j <= mesh.ny; ++j) {
      model.table.add_node({i * mesh.length / mesh.nx, j * mesh.width / mesh.ny, 0}, kFive);
    }
  }
  Part part{4, kFive, {}, {}, {}, {}};
  for (Index i = 0; i < mesh.nx; ++i) {
    for (Index j = 0; j < mesh.ny; ++j) {
      for (const Index node :
           {mesh.node(i, j), mesh.node(i + 1, j), mesh.node(i + 1, j + 1), mesh.node(i, j + 1)}) {
        part.nodes.push_back(node);
      }
    }
  }
  const Rectangle shape = mesh.element();
  const Coupling coupling = shell_coupling(options.offset);
  part.stiffness = PartMatrix{coupling, same_for_all(shell_stiffness(shape, kSteel, options.offset))};
  part.geometric = PartMatrix{full_coupling(kBending),
                              same_for_all(shell_geometric(shape, reference_force(options.load)))};
  if (options.mass == MassKind::kConsistent) {
    part.mass = PartMatrix{coupling, same_for_all(shell_mass(shape, kSteel, options.offset))};
  } else {
    Coupling diagonal{};
    for (std::size_t c = 0; c < 3; ++c) diagonal[c] = static_cast<DofSet>(1U << c);
    part.mass = PartMatrix{diagonal, same_for_all(shell_lumped_mass(shape, kSteel))};
  }
  model.parts.push_back(std::move(part));
}

/// All edges held in uz and against turning along themselves (clamped: against all turning); rollers for ux
/// on the edge x = 0 and for uy on the edge y = 0.
void support(Model& model, const PlateMesh& mesh, PlateEdges edges) {
  for (Index i = 0; i <= mesh.nx; ++i) {
    for (Index j = 0; j <= mesh.ny; ++j) {
      const bool end = i == 0 || i == mesh.nx, side = j == 0 || j == mesh.ny;
      DofSet held = 0;
      if (end) held |= dof_bit(Dof::kUz) | dof_bit(Dof::kRx);
      if (side) held |= dof_bit(Dof::kUz) | dof_bit(Dof::kRy);
      if (edges == PlateEdges::kClamped && (end || side)) held |= kBending;
      if (i == 0) held |= dof_bit(Dof::kUx);
      if (j == 0) held |= dof_bit(Dof::kUy);
      model.table.strike(mesh.node(i, j), held);
    }
  }
}

/// A patch inside the plate gets its own nodes.
std::vector<Index> cut_patch_out(Model& model, const PlateMesh& mesh) {
  const Index i0 = mesh.nx / 3, i1 = std::max(i0 + 1, 2 * mesh.nx / 3);
  const Index j0 = mesh.ny / 3, j1 = std::max(j0 + 1, 2 * mesh.ny / 3);
  return detach(model, [=](const Part&, Offset e) {
    const auto i = static_cast<Index>(e / mesh.ny), j = static_cast<Index>(e % mesh.ny);
    return i >= i0 && i < i1 && j >= j0 && j < j1;
  });
}

/// One half wave in either direction.
TrialMotion half_wave(const PlateMesh& mesh) {
  const double a = std::numbers::pi / mesh.length, b = std::numbers::pi / mesh.width;
  return [a, b](const Point& p) -> std::array<double, 6> {
    return {0,
            0,
            std::sin(a * p.x) * std::sin(b * p.y),
            b * std::sin(a * p.x) * std::cos(b * p.y),
            -a * std::cos(a * p.x) * std::sin(b * p.y),
            0};
  };
}

ExpectedInertia expected_inertia(const Specimen& specimen, Fault fault) {
  return inertia_in_space(
      specimen, fault,
      {.sound = "a plate held along its edges, in its plane by rollers on two sides",
       .free = "a flat plate without supports has its six rigid motions",
       .loose = "a patch of the plate shares no node with the rest: six rigid motions of its own",
       .softly_held = "the loose patch is held by",
       .motion = "a half wave"});
}

/// Values of all half-wave pairs (m, n) that `nx`, `ny` elements resolve, of which the spectrum is complete
/// up to the least value left out.
template <class Value>
std::vector<SpectrumValue> navier_spectrum(const PlateMesh& mesh, const Value& value_of) {
  const Index most = 40;
  double complete = 1e300;
  std::vector<SpectrumValue> spectrum;
  for (Index m = 1; m <= most; ++m) {
    for (Index n = 1; n <= most; ++n) {
      const double value = value_of(m, n);
      const double coarse = std::max(static_cast<double>(m) / mesh.nx, static_cast<double>(n) / mesh.ny);
      if (coarse > 0.25 || m == most || n == most) {
        complete = std::min(complete, value);
      } else {
        spectrum.push_back({value, 2 * coarse * coarse});
      }
    }
  }
  std::erase_if(spectrum,
                [&](const SpectrumValue& v) { return v.value * (1 + v.tolerance) > 0.7 * complete; });
  return spectrum;
}

/// Navier's closed forms for simply supported edges: buckling and, with consistent mass, bending vibration.
void add_closed_forms(Specimen& specimen, const PlateMesh& mesh, const SpecimenOptions& options) {
  const double pi = std::numbers::pi, nu = kSteel.poisson;
  const double rigidity = kSteel.youngs_modulus * std::pow(kThickness, 3) / (12 * (1 - nu * nu));
  const auto wave = [&](Index m, Index n) {
    return pi * pi * (std::pow(m / mesh.length, 2) + std::pow(n / mesh.width, 2));
  };
  if (options.load != PlateLoad::kShear) {
    const bool biaxial = options.load == PlateLoad::kBiaxial;
    const std::string why =
        "Navier's closed form, Timoshenko and Gere, Theory of Elastic Stability, 2nd ed. 1961, ch. 9 (from "
        "memory); the mesh meets it within the tolerance";
    auto spectrum = navier_spectrum(mesh, [&](Index m, Index n) {
      const double pushed = biaxial ? wave(m, n) : std::pow(m * pi / mesh.length, 2);
      return rigidity * std::pow(wave(m, n), 2) / (kReferenceForce * pushed);
    });
    specimen.expected.counts = counts_in_gaps(Pencil::kGeometric, spectrum, 0.02, 4, why);
    specimen.expected.values = lowest_values(Pencil::kGeometric, spectrum, 3, why);
  }
}

}  // namespace

Result<Specimen> make_plate(Offset unknowns, const SpecimenOptions& options) {
  const PlateMesh mesh = mesh_for(unknowns, options.aspect);
  Model model;
  add_elements(model, mesh, options);
  if (options.fault != Fault::kFree) support(model, mesh, options.edges);
  if (options.fault == Fault::kLoosePart) cut_patch_out(model, mesh);
  if (options.fault == Fault::kSoftSpring) {
    const double bending =
        kSteel.youngs_modulus * std::pow(kThickness, 3) / std::pow(mesh.width / mesh.ny, 2);
    hold_softly(model, cut_patch_out(model, mesh), options.softness * bending);
  }
  Specimen specimen = finish(std::move(model));
  if (options.fault == Fault::kNegativeSpring) add_negative_spring(specimen, half_wave(mesh));
  specimen.name = "plate";
  specimen.scenario = "Steel skin plate of a lock gate, " + std::to_string(mesh.nx) + " x " +
                      std::to_string(mesh.ny) +
                      " rectangles, 2 m wide, 10 mm thick, under 100 kN/m in its plane.";
  specimen.expected.inertia = expected_inertia(specimen, options.fault);
  const bool navier =
      options.fault == Fault::kNone && options.edges == PlateEdges::kSimple && options.offset == 0;
  if (navier) add_closed_forms(specimen, mesh, options);
  return specimen;
}

}  // namespace stanchion::specimen
