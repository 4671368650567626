#include <algorithm>
#include <map>
#include <set>

#include "diagnose/naming.hpp"
#include "diagnose/shares.hpp"

namespace stanchion {
namespace {

void add_part(Evidence& e, Index part, const std::vector<const RepeatedConstraint*>& members) {
  Direction direction;
  direction.cause = Cause::kRedundantConstraint;
  direction.count = static_cast<Index>(members.size());
  direction.component = part;
  double residual = 0;
  std::map<Index, double> share;
  for (const RepeatedConstraint* member : members) {
    residual = std::max(residual, member->residual);
    for (std::size_t r = 0; r < member->rows.size(); ++r)
      share[member->rows[r]] += member->entry[r] * member->entry[r] / direction.count;
  }
  direction.residual = residual;
  std::vector<Index> rows;
  std::set<Index> nodes;
  std::vector<double> shares;
  for (const auto& [row, part_of_all] : share) {
    rows.push_back(row);
    shares.push_back(part_of_all);
    nodes.insert(e.s.node_of[static_cast<std::size_t>(row)]);
  }
  direction.moving_nodes = static_cast<Index>(nodes.size());
  direction.moving_rows = static_cast<Index>(rows.size());
  direction.nodes = ranked(e.s, rows, shares, kShownShares);
  e.nullity[part] += direction.count;
  CauseFacts facts;
  facts.place = place_of(direction);
  facts.follow = !members.front()->in_proportion;
  e.add(std::move(direction), std::move(facts));
}

}  // namespace

void name_repeated_constraints(Evidence& evidence) {
  for (const bool in_proportion : {true, false}) {
    std::map<Index, std::vector<const RepeatedConstraint*>> by_part;
    for (const RepeatedConstraint& one : evidence.motions.of_constraints) {
      if (one.in_proportion == in_proportion) by_part[evidence.part_of_row(one.rows.front())].push_back(&one);
    }
    for (const auto& [part, members] : by_part) add_part(evidence, part, members);
  }
}

}  // namespace stanchion
