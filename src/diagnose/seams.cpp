#include "diagnose/seams.hpp"

#include <algorithm>

#include "io/coincident.hpp"
#include "io/joined_pairs.hpp"
#include "model/numbers.hpp"

namespace stanchion {

std::string Seams::in_words(const Structure& s, const std::vector<Index>& nodes) const {
  std::string text;
  std::size_t more = 0;
  for (const auto& [a, b] : pairs) {
    const bool here = std::binary_search(nodes.begin(), nodes.end(), a),
               there = std::binary_search(nodes.begin(), nodes.end(), b);
    if (here == there) continue;  // a seam between what moves and what does not
    if (text.empty()) {
      text = "Nodes " + std::to_string(s.number[static_cast<std::size_t>(a)]) + " and " +
             std::to_string(s.number[static_cast<std::size_t>(b)]) +
             " lie at one place and are not connected";
    } else {
      ++more;
    }
  }
  if (more > 0)
    text += " (and " + grouped(static_cast<Offset>(more)) + " more such pair" + (more == 1 ? "" : "s") + ")";
  return text;
}

Seams find_seams(const Structure& s, const ShiftedMatrix& matrix) {
  Seams seams;
  if (!s.placed) return seams;
  const auto multiplies = [&s](Index row) {
    return s.kind[static_cast<std::size_t>(row)] == DofKind::kMultiplier;
  };
  std::vector<char> moves(static_cast<std::size_t>(s.nodes), 0);  // has a dof, not multipliers alone
  for (Index row = 0; row < s.rows; ++row) {
    if (!multiplies(row)) moves[static_cast<std::size_t>(s.node_of[static_cast<std::size_t>(row)])] = 1;
  }
  std::vector<std::size_t> nodes;
  std::vector<std::array<double, 3>> places;
  for (std::size_t node = 0; node < moves.size(); ++node) {
    if (!s.has_place[node] || !moves[node]) continue;
    nodes.push_back(node);
    places.push_back(s.place[node]);
  }
  std::vector<std::pair<std::size_t, std::size_t>> pairs;
  for (const auto& [a, b] : coincident_places(places, 1e-9 * extent_of(places)))
    pairs.emplace_back(nodes[a], nodes[b]);
  if (pairs.empty()) return seams;
  JoinedPairs joined(pairs, static_cast<std::size_t>(s.nodes));
  const MatrixFamily& family = *matrix.family;
  for (Index j = 0; j < family.rows; ++j) {
    const auto a = static_cast<std::size_t>(s.node_of[static_cast<std::size_t>(j)]);
    if (!multiplies(j) && !joined.concerns(a)) continue;
    for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
      const Index i = family.row[k];
      const auto b = static_cast<std::size_t>(s.node_of[static_cast<std::size_t>(i)]);
      if (matrix.entry(k, i, j) == 0 || (multiplies(i) && multiplies(j))) continue;
      if (multiplies(i) || multiplies(j)) {
        const std::size_t held = multiplies(i) ? a : b;
        if (joined.concerns(held)) joined.add_constraint(multiplies(i) ? i : j, held);
      } else if (a != b && joined.concerns(a) && joined.concerns(b)) {
        joined.add_stiffness(a, b);
      }
    }
  }
  for (const auto& [a, b] : joined.apart())
    seams.pairs.emplace_back(static_cast<Index>(a), static_cast<Index>(b));
  return seams;
}

}  // namespace stanchion
