#include "specimen/member_part.hpp"

#include <algorithm>
#include <memory>
#include <utility>

namespace stanchion::specimen {
namespace {

using MatrixOf = std::function<ElementMatrix<12>(const PlacedMember&)>;
using Members = std::shared_ptr<const std::vector<PlacedMember>>;

/// The union of the couplings of all members' matrices; every unknown meets itself.
Coupling coupling_of(const std::vector<PlacedMember>& members, const MatrixOf& matrix_of) {
  Coupling coupling{};
  for (std::size_t c = 0; c < 6; ++c) coupling[c] = static_cast<DofSet>(1U << c);
  for (const PlacedMember& member : members) {
    const ElementMatrix<12> matrix = matrix_of(member);
    for (int i = 0; i < 12; ++i) {
      for (int j = 0; j < 12; ++j) {
        if (matrix(i, j) != 0)
          coupling[static_cast<std::size_t>(i % 6)] |= static_cast<DofSet>(1U << (j % 6));
      }
    }
  }
  return coupling;
}

PartMatrix part_matrix(const Members& members, const MatrixOf& matrix_of) {
  return {coupling_of(*members, matrix_of), [members, matrix_of](Offset e, std::span<double> out) {
            const ElementMatrix<12> matrix = matrix_of((*members)[static_cast<std::size_t>(e)]);
            std::copy(matrix.entry.begin(), matrix.entry.end(), out.begin());
          }};
}

}  // namespace

Part member_part(std::vector<PlacedMember> members, const MemberKind& kind) {
  Part part{2, kAllSix, {}, {}, {}, {}};
  for (const PlacedMember& m : members) part.nodes.insert(part.nodes.end(), {m.start, m.end});
  const bool loaded =
      std::any_of(members.begin(), members.end(), [](const PlacedMember& m) { return m.axial_force != 0; });
  const Members shared = std::make_shared<const std::vector<PlacedMember>>(std::move(members));
  const bool lumped = kind.pinned || kind.mass == MassKind::kLumped;
  part.stiffness = part_matrix(shared, [kind](const PlacedMember& m) {
    return kind.pinned ? bar_stiffness(m.line, kind.material, kind.section)
                       : beam_stiffness(m.line, kind.material, kind.section);
  });
  part.mass = part_matrix(shared, [kind, lumped](const PlacedMember& m) {
    return lumped ? beam_lumped_mass(m.line, kind.material, kind.section)
                  : beam_mass(m.line, kind.material, kind.section);
  });
  if (loaded) {
    part.geometric = part_matrix(shared, [kind](const PlacedMember& m) {
      return kind.pinned ? bar_geometric(m.line, m.axial_force) : beam_geometric(m.line, m.axial_force);
    });
  }
  return part;
}

}  // namespace stanchion::specimen
