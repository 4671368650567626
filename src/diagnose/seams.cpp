#include "diagnose/seams.hpp"

#include <algorithm>
#include <set>

#include "io/coincident.hpp"

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
  if (more > 0) text += " (and " + std::to_string(more) + " more such pair" + (more == 1 ? "" : "s") + ")";
  return text;
}

Seams find_seams(const Structure& s, const ShiftedMatrix& matrix) {
  Seams seams;
  if (!s.placed) return seams;
  std::vector<Index> nodes;
  std::vector<std::array<double, 3>> places;
  for (Index node = 0; node < s.nodes; ++node) {
    if (!s.has_place[static_cast<std::size_t>(node)]) continue;
    nodes.push_back(node);
    places.push_back(s.place[static_cast<std::size_t>(node)]);
  }
  for (const auto& [a, b] : coincident_places(places, 1e-9 * extent_of(places)))
    seams.pairs.emplace_back(nodes[a], nodes[b]);
  if (seams.pairs.empty()) return seams;
  std::set<std::pair<Index, Index>> linked;
  const MatrixFamily& family = *matrix.family;
  std::vector<char> concerned(static_cast<std::size_t>(s.nodes), 0);
  for (const auto& [a, b] : seams.pairs)
    concerned[static_cast<std::size_t>(a)] = concerned[static_cast<std::size_t>(b)] = 1;
  for (Index j = 0; j < family.rows; ++j) {
    const Index a = s.node_of[static_cast<std::size_t>(j)];
    if (!concerned[static_cast<std::size_t>(a)]) continue;
    for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
      const Index b = s.node_of[static_cast<std::size_t>(family.row[k])];
      if (a == b || !concerned[static_cast<std::size_t>(b)] || matrix.entry(k, family.row[k], j) == 0)
        continue;
      const std::pair<Index, Index> pair{std::min(a, b), std::max(a, b)};
      if (std::binary_search(seams.pairs.begin(), seams.pairs.end(), pair)) linked.insert(pair);
    }
  }
  std::erase_if(seams.pairs, [&](const std::pair<Index, Index>& pair) { return linked.count(pair) > 0; });
  return seams;
}

}  // namespace stanchion
