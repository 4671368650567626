#include "diagnose/distinct.hpp"
#include "diagnose/naming.hpp"
#include "diagnose/shares.hpp"

namespace stanchion {

void name_stiff_couplings(Evidence& e) {
  const auto& couplings = e.couplings;
  if (couplings.empty()) return;
  Direction direction;
  direction.cause = Cause::kOverStiffCoupling;
  direction.sign = 1;
  direction.count = static_cast<Index>(couplings.size());
  std::vector<Index> nodes;
  CauseFacts facts;
  facts.digits = couplings.front().digits;
  facts.place = e.s.describe(couplings.front().row);
  if (couplings.front().other >= 0) facts.place += " with " + e.s.describe(couplings.front().other);
  for (const StiffCoupling& c : couplings) {
    for (const Index row : {c.row, c.other}) {
      if (row < 0) continue;
      nodes.push_back(e.s.node_of[static_cast<std::size_t>(row)]);
      if (direction.nodes.size() >= kShownShares) continue;
      auto entry = ranked(e.s, {row}, {1.0}, 1).front();
      entry.share = 1.0 / direction.count / (c.other < 0 ? 1 : 2);
      direction.nodes.push_back(std::move(entry));
    }
  }
  make_distinct(nodes);
  direction.moving_nodes = static_cast<Index>(nodes.size());
  direction.moving_rows = static_cast<Index>(couplings.size());
  direction.energy = 1;
  direction.component = e.part_of_row(couplings.front().row);
  e.add(std::move(direction), std::move(facts));
}

}  // namespace stanchion
