#include "diagnose/local_motions.hpp"

#include <span>

namespace stanchion {
namespace {

/// x := x less its part along the unit vector `entry` on `rows`.
void remove_along(std::span<const Index> rows, const std::vector<double>& entry, Columns& x) {
  for (Index c = 0; c < x.count; ++c) {
    double along = 0;
    for (std::size_t r = 0; r < entry.size(); ++r) along += entry[r] * x.row(rows[r])[c];
    for (std::size_t r = 0; r < entry.size(); ++r) x.row(rows[r])[c] -= along * entry[r];
  }
}

}  // namespace

LocalMotions find_local_motions(const Structure& structure, const ShiftedMatrix& matrix, ThreadPool& pool) {
  LocalMotions motions;
  motions.of_nodes = find_node_motions(structure, matrix, pool);
  motions.of_constraints = find_repeated_constraints(structure, matrix, motions.of_nodes);
  return motions;
}

void remove(const LocalMotions& motions, const Structure& structure, Columns& x) {
  for (const NodeMotion& motion : motions.of_nodes)
    remove_along(structure.rows_of(motion.node), motion.entry, x);
  for (const RepeatedConstraint& motion : motions.of_constraints) remove_along(motion.rows, motion.entry, x);
}

}  // namespace stanchion
