#include "specimen/specimen.hpp"

#include <array>
#include <new>
#include <string_view>

#include "specimen/models.hpp"
#include "specimen/options.hpp"

namespace stanchion {
namespace {

using Maker = Result<Specimen> (*)(Offset, const SpecimenOptions&);

constexpr std::array kList{
    SpecimenEntry{"solid", "block of 8-node bricks clamped at one face; K, M",
                  "none free loose-part hinge soft-spring negative-spring"},
    SpecimenEntry{"plate", "thin plate in compression or shear, 5 unknowns a node; K, G, M",
                  "none free loose-part soft-spring negative-spring"},
    SpecimenEntry{"cylinder", "thin cylinder in axial compression, 6 unknowns a node; K, G, M",
                  "none free loose-part soft-spring negative-spring"},
    SpecimenEntry{"frame", "space frame of several storeys under its floors, 6 unknowns a node; K, G, M",
                  "none free loose-part hinge soft-spring negative-spring"},
    SpecimenEntry{"lattice", "footbridge of two trusses over a harbour lock, under a crowd; K, G, M",
                  "none free loose-part negative-spring"},
    SpecimenEntry{"column", "column of plane beams, exact entries, Euler's critical loads; K, G, M",
                  "none free"},
    SpecimenEntry{"saddle", "two blocks of bricks tied by Lagrange multipliers; K, M",
                  "none free repeated-tie"},
    SpecimenEntry{"laplace", "7-point Laplacian of a box, every eigenvalue known in closed form; K",
                  "none free"},
};
constexpr std::array<Maker, kList.size()> kMakers{
    specimen::make_solid,   specimen::make_plate,  specimen::make_cylinder, specimen::make_frame,
    specimen::make_lattice, specimen::make_column, specimen::make_saddle,   specimen::make_laplace};

}  // namespace

std::span<const SpecimenEntry> specimen_list() {
  return kList;
}

Result<Specimen> make_specimen(const std::string& name, Offset unknowns, const SpecimenOptions& options) {
  for (std::size_t i = 0; i < kList.size(); ++i) {
    if (name != kList[i].name) continue;
    if (Status status = specimen::check_options(kList[i], unknowns, options); !status.ok()) return status;
    try {
      return kMakers[i](unknowns, options);
    } catch (const std::bad_alloc&) {
      return Status::resource_limit("out-of-memory", "not enough memory for this specimen", name,
                                    "ask for fewer unknowns");
    }
  }
  std::string known;
  for (const SpecimenEntry& entry : kList) known += std::string(known.empty() ? "" : ", ") + entry.name;
  return Status::bad_usage("unknown-specimen", "there is no specimen called '" + name + "'", "specimen",
                           "choose one of " + known);
}

}  // namespace stanchion
