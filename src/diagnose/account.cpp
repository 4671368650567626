#include <algorithm>

#include "diagnose/naming.hpp"

namespace stanchion {
namespace {

constexpr std::size_t kPartsShown = 200;

void add_parts(Evidence& e) {
  const auto shown = std::min(kPartsShown, static_cast<std::size_t>(e.s.parts));
  std::vector<std::array<double, 6>> energies;
  if (e.s.named) energies = rigid_energies(e.s, e.rigid_probe());
  for (std::size_t part = 0; part < shown; ++part) {
    ComponentRecord record;
    record.rows = e.s.part_rows[part];
    record.nodes = e.s.part_nodes[part];
    const auto at = e.nullity.find(static_cast<Index>(part));
    record.nullity = at == e.nullity.end() ? 0 : at->second;
    if (e.s.named && e.s.placed) record.rigid_energy = energies[part];
    e.out.components.push_back(record);
  }
  e.out.components_left_out = e.s.parts - static_cast<Index>(shown);
  for (Direction& direction : e.out.directions) {
    if (direction.component && static_cast<std::size_t>(*direction.component) >= shown)
      direction.component.reset();
  }
}

}  // namespace

void account(Evidence& e) {
  e.out.zero = e.inertia.zero;
  std::stable_sort(
      e.out.directions.begin(), e.out.directions.end(), [](const Direction& a, const Direction& b) {
        const auto rank = [](const Direction& d) { return d.cause == Cause::kUnresolved ? 3 : d.sign + 1; };
        return rank(a) < rank(b);
      });
  const auto most = static_cast<std::size_t>(e.in.options.most);
  if (e.out.directions.size() > most) e.out.directions.resize(most);
  Index zero = 0, negative = 0;
  for (const Direction& d : e.out.directions)
    (d.sign == 0 ? zero : d.sign < 0 ? negative : zero) += d.sign == 1 ? 0 : d.count;
  Index found = e.motions.count();
  for (const PartChoice& choice : e.choice) found += static_cast<Index>(choice.zero.size());
  if (found < e.inertia.zero && found == zero) {
    Direction rest;
    rest.count = e.inertia.zero - found;
    CauseFacts facts;
    facts.unresolved_because =
        "These zero directions were counted but not reached by the vectors at hand; no cause is named.";
    e.add(std::move(rest), std::move(facts));
    zero = e.inertia.zero;
  }
  e.out.not_located = std::max<Index>(0, e.out.zero - zero) + std::max<Index>(0, e.out.negative - negative);
  add_parts(e);
}

}  // namespace stanchion
