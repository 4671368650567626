// A space frame of several storeys: rigid-jointed columns and beams, loaded by its floors.
#include <algorithm>
#include <cmath>

#include "specimen/faults.hpp"
#include "specimen/member_part.hpp"
#include "specimen/models.hpp"

namespace stanchion::specimen {
namespace {

constexpr double kBayX = 6.0, kBayY = 5.0, kStorey = 3.6;  // m
constexpr double kFloorLoad = 7.5e3;                       // N/m^2, reference load of every floor
constexpr Section kColumn{0.0232, 5.68e-4, 5.68e-4, 8.7e-4};
constexpr Section kBeam{0.0098, 2.61e-4, 1.9e-5, 6.2e-7};

struct FrameMesh {
  Index bays_x = 1, bays_y = 1, storeys = 1;

  Index node(Index i, Index j, Index floor) const { return (floor * (bays_y + 1) + j) * (bays_x + 1) + i; }
};

FrameMesh mesh_for(Offset unknowns) {
  const double target = static_cast<double>(unknowns);
  const auto side = std::max<Index>(2, static_cast<Index>(std::lround(std::cbrt(target / 6))));
  FrameMesh mesh{side - 1, side - 1, 1};
  mesh.storeys = std::max<Index>(1, static_cast<Index>(std::lround(target / (6.0 * side * side))));
  return mesh;
}

/// Columns with the load of the floors above them: each node carries the area halfway to its neighbours.
std::vector<PlacedMember> columns_of(const FrameMesh& mesh, const DofTable& table) {
  std::vector<PlacedMember> columns;
  for (Index floor = 0; floor < mesh.storeys; ++floor) {
    for (Index j = 0; j <= mesh.bays_y; ++j) {
      for (Index i = 0; i <= mesh.bays_x; ++i) {
        const double area = (i == 0 || i == mesh.bays_x ? 0.5 : 1) * (j == 0 || j == mesh.bays_y ? 0.5 : 1);
        const Index low = mesh.node(i, j, floor), high = mesh.node(i, j, floor + 1);
        const double force = -kFloorLoad * kBayX * kBayY * area * (mesh.storeys - floor);
        columns.push_back({low, high, {table.place(low), table.place(high), {1, 0, 0}}, force});
      }
    }
  }
  return columns;
}

/// The beams along x (or, with `across`, along y) of all floors.
std::vector<PlacedMember> beams_of(const FrameMesh& mesh, const DofTable& table, bool across) {
  std::vector<PlacedMember> beams;
  for (Index floor = 1; floor <= mesh.storeys; ++floor) {
    for (Index j = 0; j <= mesh.bays_y - (across ? 1 : 0); ++j) {
      for (Index i = 0; i <= mesh.bays_x - (across ? 0 : 1); ++i) {
        const Index a = mesh.node(i, j, floor);
        const Index b = across ? mesh.node(i, j + 1, floor) : mesh.node(i + 1, j, floor);
        beams.push_back({a, b, {table.place(a), table.place(b), {0, 0, 1}}, 0});
      }
    }
  }
  return beams;
}

void add_members(Model& model, const FrameMesh& mesh, const SpecimenOptions& options) {
  std::vector<PlacedMember> columns = columns_of(mesh, model.table), pinned;
  if (options.fault == Fault::kHinge) {
    const auto floor = static_cast<std::ptrdiff_t>((mesh.bays_x + 1) * (mesh.bays_y + 1));
    const auto first = columns.begin() + mesh.storeys / 2 * floor;
    pinned.assign(first, first + floor);
    columns.erase(first, first + floor);
  }
  const MemberKind column{kSteel, kColumn, false, options.mass}, pin{kSteel, kColumn, true, options.mass};
  const MemberKind beam{kSteel, kBeam, false, options.mass};
  if (!columns.empty()) model.parts.push_back(member_part(std::move(columns), column));
  if (!pinned.empty()) model.parts.push_back(member_part(std::move(pinned), pin));
  model.parts.push_back(member_part(beams_of(mesh, model.table, false), beam));
  model.parts.push_back(member_part(beams_of(mesh, model.table, true), beam));
}

/// The four roof beams over the first corner bay get their own nodes.
std::vector<Index> cut_roof_corner_off(Model& model, const FrameMesh& mesh) {
  return detach(model, [&](const Part& part, Offset e) {
    const Point c = centre_of(model, part, e);
    const bool roof = c.z > (mesh.storeys - 0.25) * kStorey;
    return roof && c.x < 1.25 * kBayX && c.y < 1.25 * kBayY;
  });
}

ExpectedInertia expected_inertia(const Specimen& specimen, Fault fault) {
  if (fault == Fault::kHinge) {
    return inertia_of(specimen, 0, 3,
                      "all columns of one storey are pinned at both ends: what is above sways in x and y and "
                      "turns about z");
  }
  return inertia_in_space(
      specimen, fault,
      {.sound = "a connected rigid-jointed frame with clamped feet",
       .free = "a rigid-jointed frame without supports has its six rigid motions",
       .loose = "four roof beams are joined to each other but not to the columns: six rigid motions",
       .softly_held = "the loose roof beams lie on",
       .motion = "a sway motion"});
}

}  // namespace

Result<Specimen> make_frame(Offset unknowns, const SpecimenOptions& options) {
  const FrameMesh mesh = mesh_for(unknowns);
  Model model;
  for (Index floor = 0; floor <= mesh.storeys; ++floor) {
    for (Index j = 0; j <= mesh.bays_y; ++j) {
      for (Index i = 0; i <= mesh.bays_x; ++i) {
        const bool clamped = floor == 0 && options.fault != Fault::kFree;
        model.table.add_node({i * kBayX, j * kBayY, floor * kStorey}, clamped ? DofSet{0} : kAllSix);
      }
    }
  }
  add_members(model, mesh, options);
  if (options.fault == Fault::kLoosePart) cut_roof_corner_off(model, mesh);
  if (options.fault == Fault::kSoftSpring) {
    const double bending = 12 * kSteel.youngs_modulus * kBeam.inertia_z / std::pow(kBayX, 3);
    hold_softly(model, cut_roof_corner_off(model, mesh), options.softness * bending);
  }
  Specimen specimen = finish(std::move(model));
  if (options.fault == Fault::kNegativeSpring) {
    add_negative_spring(specimen,
                        [](const Point& p) -> std::array<double, 6> { return {p.z, 0, 0, 0, 0, 0}; });
  }
  specimen.name = "frame";
  specimen.scenario = "Steel harbour store, rigid-jointed space frame of " + std::to_string(mesh.bays_x) +
                      " x " + std::to_string(mesh.bays_y) + " bays and " + std::to_string(mesh.storeys) +
                      " storeys, feet clamped, 7.5 kN/m2 on every floor.";
  specimen.expected.inertia = expected_inertia(specimen, options.fault);
  return specimen;
}

}  // namespace stanchion::specimen
