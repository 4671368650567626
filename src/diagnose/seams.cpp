#include "diagnose/seams.hpp"

#include <algorithm>
#include <cmath>
#include <set>

namespace stanchion {

std::string Seams::in_words(const Structure& s, const std::vector<Index>& nodes) const {
  std::string text;
  std::size_t more = 0;
  for (const auto& [a, b] : pairs) {
    const bool here = std::binary_search(nodes.begin(), nodes.end(), a), there = std::binary_search(nodes.begin(), nodes.end(), b);
    if (here == there) continue;  // a seam between what moves and what does not
    if (text.empty()) {
      text = "Nodes " + std::to_string(s.number[static_cast<std::size_t>(a)]) + " and " +
             std::to_string(s.number[static_cast<std::size_t>(b)]) + " lie at one place and are not connected";
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
  std::array<double, 3> low{}, high{};
  bool first = true;
  std::vector<Index> order;
  for (Index node = 0; node < s.nodes; ++node) {
    const auto a = static_cast<std::size_t>(node);
    if (!s.has_place[a]) continue;
    order.push_back(node);
    for (std::size_t d = 0; d < 3; ++d) {
      low[d] = first ? s.place[a][d] : std::min(low[d], s.place[a][d]);
      high[d] = first ? s.place[a][d] : std::max(high[d], s.place[a][d]);
    }
    first = false;
  }
  double size = 0;
  for (std::size_t d = 0; d < 3; ++d) size = std::max(size, high[d] - low[d]);
  const double near = 1e-9 * size;
  const auto place = [&](Index node) -> const std::array<double, 3>& { return s.place[static_cast<std::size_t>(node)]; };
  std::sort(order.begin(), order.end(), [&](Index a, Index b) {
    return place(a)[0] != place(b)[0] ? place(a)[0] < place(b)[0] : a < b;
  });
  // Along x, a window of `near` sorted by y: few nodes share both.
  for (std::size_t begin = 0; begin < order.size();) {
    std::size_t end = begin + 1;
    while (end < order.size() && place(order[end])[0] - place(order[end - 1])[0] <= near) ++end;
    std::vector<Index> window(order.begin() + static_cast<std::ptrdiff_t>(begin), order.begin() + static_cast<std::ptrdiff_t>(end));
    std::sort(window.begin(), window.end(), [&](Index a, Index b) {
      const auto &p = place(a), &q = place(b);
      return p[1] != q[1] ? p[1] < q[1] : p[2] != q[2] ? p[2] < q[2] : a < b;
    });
    for (std::size_t k = 0; k + 1 < window.size(); ++k) {
      for (std::size_t j = k + 1; j < window.size() && j < k + 8; ++j) {
        const auto &p = place(window[k]), &q = place(window[j]);
        if (q[1] - p[1] > near) break;
        if (std::fabs(q[2] - p[2]) > near || std::fabs(q[0] - p[0]) > near) continue;
        seams.pairs.emplace_back(std::min(window[k], window[j]), std::max(window[k], window[j]));
      }
    }
    begin = end;
  }
  if (seams.pairs.empty()) return seams;
  std::sort(seams.pairs.begin(), seams.pairs.end());
  std::set<std::pair<Index, Index>> linked;
  const MatrixFamily& family = *matrix.family;
  std::vector<char> concerned(static_cast<std::size_t>(s.nodes), 0);
  for (const auto& [a, b] : seams.pairs) concerned[static_cast<std::size_t>(a)] = concerned[static_cast<std::size_t>(b)] = 1;
  for (Index j = 0; j < family.rows; ++j) {
    const Index a = s.node_of[static_cast<std::size_t>(j)];
    if (!concerned[static_cast<std::size_t>(a)]) continue;
    for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
      const Index b = s.node_of[static_cast<std::size_t>(family.row[k])];
      if (a == b || !concerned[static_cast<std::size_t>(b)] || matrix.entry(k, family.row[k], j) == 0) continue;
      const std::pair<Index, Index> pair{std::min(a, b), std::max(a, b)};
      if (std::binary_search(seams.pairs.begin(), seams.pairs.end(), pair)) linked.insert(pair);
    }
  }
  std::erase_if(seams.pairs, [&](const std::pair<Index, Index>& pair) { return linked.count(pair) > 0; });
  return seams;
}

}  // namespace stanchion
