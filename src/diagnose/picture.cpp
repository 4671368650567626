#include "diagnose/picture.hpp"

#include <algorithm>
#include <cmath>

namespace stanchion {
namespace {

constexpr std::size_t kMostLinkedNodes = 40000;

using Neighbours = std::vector<std::vector<Index>>;

Neighbours neighbours_of(const Structure& s, const ShiftedMatrix& matrix, const std::vector<Index>& at_node,
                         std::size_t nodes) {
  Neighbours list(nodes);
  const MatrixFamily& family = *matrix.family;
  for (Index j = 0; j < family.rows; ++j) {
    const Index a = at_node[static_cast<std::size_t>(s.node_of[static_cast<std::size_t>(j)])];
    if (a < 0) continue;
    for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
      const Index b = at_node[static_cast<std::size_t>(s.node_of[static_cast<std::size_t>(family.row[k])])];
      if (b < 0 || a == b || matrix.entry(k, family.row[k], j) == 0) continue;
      list[static_cast<std::size_t>(a)].push_back(b);
      list[static_cast<std::size_t>(b)].push_back(a);
    }
  }
  for (auto& one : list) {
    std::sort(one.begin(), one.end());
    one.erase(std::unique(one.begin(), one.end()), one.end());
  }
  return list;
}

double squared_distance(const std::array<double, 3>& a, const std::array<double, 3>& b) {
  double sum = 0;
  for (std::size_t d = 0; d < 3; ++d) sum += (a[d] - b[d]) * (a[d] - b[d]);
  return sum;
}

/// Two other common neighbours, linked to each other, whose line crosses this one near the middle of both.
bool is_diagonal(const Picture& picture, const Neighbours& list, Index a, Index b) {
  const auto& pa = picture.place[static_cast<std::size_t>(a)];
  const auto& pb = picture.place[static_cast<std::size_t>(b)];
  std::array<double, 3> middle{};
  for (std::size_t d = 0; d < 3; ++d) middle[d] = (pa[d] + pb[d]) / 2;
  const double length = squared_distance(pa, pb);
  std::vector<Index> common;
  std::set_intersection(list[static_cast<std::size_t>(a)].begin(), list[static_cast<std::size_t>(a)].end(),
                        list[static_cast<std::size_t>(b)].begin(), list[static_cast<std::size_t>(b)].end(),
                        std::back_inserter(common));
  for (std::size_t i = 0; i < common.size(); ++i) {
    for (std::size_t j = i + 1; j < common.size(); ++j) {
      const auto& pc = picture.place[static_cast<std::size_t>(common[i])];
      const auto& pd = picture.place[static_cast<std::size_t>(common[j])];
      std::array<double, 3> other{};
      for (std::size_t d = 0; d < 3; ++d) other[d] = (pc[d] + pd[d]) / 2;
      if (squared_distance(middle, other) > 0.01 * length || squared_distance(pc, pd) > 4 * length) continue;
      if (std::binary_search(list[static_cast<std::size_t>(common[i])].begin(),
                             list[static_cast<std::size_t>(common[i])].end(), common[j])) {
        return true;
      }
    }
  }
  return false;
}

}  // namespace

ModelPicture make_picture(const Structure& s, const ShiftedMatrix& matrix) {
  ModelPicture result;
  result.at_node.assign(static_cast<std::size_t>(s.nodes), -1);
  Picture& picture = result.picture;
  if (!s.placed) return result;
  for (Index node = 0; node < s.nodes; ++node) {
    const auto a = static_cast<std::size_t>(node);
    if (!s.has_place[a]) continue;
    result.at_node[a] = static_cast<Index>(picture.node.size());
    picture.node.push_back(s.number[a]);
    picture.place.push_back(s.place[a]);
    picture.component.push_back(s.part_of[a]);
  }
  if (picture.node.size() > kMostLinkedNodes) return result;
  const Neighbours list = neighbours_of(s, matrix, result.at_node, picture.node.size());
  for (std::size_t a = 0; a < list.size(); ++a) {
    for (const Index b : list[a]) {
      if (b <= static_cast<Index>(a) || is_diagonal(picture, list, static_cast<Index>(a), b)) continue;
      picture.links.emplace_back(static_cast<Index>(a), b);
    }
  }
  return result;
}

}  // namespace stanchion
