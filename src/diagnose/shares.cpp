#include "diagnose/shares.hpp"

#include <algorithm>
#include <cmath>
#include <functional>
#include <numeric>

namespace stanchion {

std::vector<double> row_shares(const Structure& s, const LocalVectors& motion) {
  std::vector<double> share(motion.rows.size(), 0.0);
  for (std::size_t c = 0; c < motion.count; ++c) {
    double sum = 0;
    const auto of = [&](std::size_t i) {
      const double a = std::fabs(s.diagonal[static_cast<std::size_t>(motion.rows[i])]), y = motion.row(i)[c];
      return (a > 0 ? a : 1) * y * y;
    };
    for (std::size_t i = 0; i < share.size(); ++i) sum += of(i);
    if (!(sum > 0)) continue;
    for (std::size_t i = 0; i < share.size(); ++i)
      share[i] += of(i) / sum / static_cast<double>(motion.count);
  }
  return share;
}

std::vector<DofShare> ranked(const Structure& s, const std::vector<Index>& rows,
                             const std::vector<double>& share, std::size_t most) {
  std::vector<std::size_t> order(rows.size());
  std::iota(order.begin(), order.end(), std::size_t{0});
  const auto keep = std::min(most, order.size());
  const std::size_t sorted = std::min(order.size(), 4 * keep + 64);
  std::partial_sort(
      order.begin(), order.begin() + static_cast<std::ptrdiff_t>(sorted), order.end(),
      [&](std::size_t a, std::size_t b) { return share[a] != share[b] ? share[a] > share[b] : a < b; });
  // Shares that differ in rounding only come in the order of the equations.
  std::size_t shown = keep;
  while (shown < sorted && share[order[shown]] > share[order[keep - 1]] * (1 - 1e-9)) ++shown;
  for (std::size_t begin = 0; begin < shown;) {
    std::size_t end = begin + 1;
    while (end < shown && share[order[end]] > share[order[begin]] * (1 - 1e-9)) ++end;
    std::sort(order.begin() + static_cast<std::ptrdiff_t>(begin),
              order.begin() + static_cast<std::ptrdiff_t>(end), [&](std::size_t a, std::size_t b) {
                return s.equation[static_cast<std::size_t>(rows[a])] <
                       s.equation[static_cast<std::size_t>(rows[b])];
              });
    begin = end;
  }
  std::vector<DofShare> list;
  for (std::size_t k = 0; k < keep; ++k) {
    const Index row = rows[order[k]];
    if (!(share[order[k]] > 0)) break;
    const NodeNumber node = s.number[static_cast<std::size_t>(s.node_of[static_cast<std::size_t>(row)])];
    list.push_back({node == kNoNode ? std::nullopt : std::optional<std::int64_t>(node), s.dof_name(row),
                    s.file_equation(row), share[order[k]]});
  }
  return list;
}

Index nodes_holding(const LocalVectors& motion, const std::vector<double>& share, double part) {
  std::vector<double> of_node(motion.nodes.size(), 0.0);
  for (std::size_t a = 0; a < motion.nodes.size(); ++a) {
    for (std::size_t i = motion.first[a]; i < motion.first[a + 1]; ++i) of_node[a] += share[i];
  }
  std::sort(of_node.begin(), of_node.end(), std::greater<>());
  double sum = 0;
  Index nodes = 0;
  for (const double e : of_node) {
    if (sum >= part) break;
    sum += e;
    ++nodes;
  }
  return nodes;
}

std::vector<std::array<float, 3>> shape_of(const Structure& s, const Buffer<double>& scale,
                                           const LocalVectors& motion, std::size_t vector,
                                           const std::vector<Index>& picture_node,
                                           std::size_t nodes_in_picture) {
  std::vector<std::array<double, 3>> moved(motion.nodes.size());
  double most = 0;
  for (std::size_t a = 0; a < motion.nodes.size(); ++a) {
    std::array<double, 3> local{};
    for (std::size_t i = motion.first[a]; i < motion.first[a + 1]; ++i) {
      const DofKind kind = s.kind[static_cast<std::size_t>(motion.rows[i])];
      if (is_translation(kind))
        local[static_cast<std::size_t>(kind)] = motion.row(i)[vector] * scale[motion.rows[i]];
    }
    const auto* axes = s.axes[static_cast<std::size_t>(motion.nodes[a])];
    for (std::size_t d = 0; d < 3; ++d) {
      moved[a][d] = axes == nullptr
                        ? local[d]
                        : (*axes)[d] * local[0] + (*axes)[3 + d] * local[1] + (*axes)[6 + d] * local[2];
    }
    most = std::max(most, std::hypot(moved[a][0], moved[a][1], moved[a][2]));
  }
  if (!(most > 0) || nodes_in_picture == 0) return {};
  std::vector<std::array<float, 3>> shape(nodes_in_picture, {0, 0, 0});
  for (std::size_t a = 0; a < motion.nodes.size(); ++a) {
    const Index at = picture_node[static_cast<std::size_t>(motion.nodes[a])];
    if (at < 0) continue;
    for (std::size_t d = 0; d < 3; ++d)
      shape[static_cast<std::size_t>(at)][d] = static_cast<float>(moved[a][d] / most);
  }
  return shape;
}

}  // namespace stanchion
