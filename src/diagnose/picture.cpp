#include "diagnose/picture.hpp"

#include <algorithm>
#include <cmath>
#include <iterator>
#include <span>
#include <utility>

namespace stanchion {
namespace {

/// Who touches whom, by node of the picture, ascending.
class Neighbours {
 public:
  Neighbours(const Structure& s, const ShiftedMatrix& matrix, const std::vector<Index>& at_node,
             std::size_t nodes)
      : first_(nodes + 1, 0) {
    // Pairs of nodes, each found once from either side at most: the entries of one node's columns come
    // together.
    std::vector<std::pair<Index, Index>> pairs;
    std::vector<Index> seen(nodes, -1);
    const MatrixFamily& family = *matrix.family;
    for (Index node = 0; node < s.nodes; ++node) {
      const Index a = at_node[static_cast<std::size_t>(node)];
      if (a < 0) continue;
      for (const Index j : s.rows_of(node)) {
        for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
          const Index other = s.node_of[static_cast<std::size_t>(family.row[k])];
          const Index b = at_node[static_cast<std::size_t>(other)];
          if (b < 0 || a == b || seen[static_cast<std::size_t>(b)] == a ||
              matrix.entry(k, family.row[k], j) == 0)
            continue;
          seen[static_cast<std::size_t>(b)] = a;
          pairs.emplace_back(a, b);
        }
      }
    }
    for (const auto& [a, b] : pairs) {
      ++first_[static_cast<std::size_t>(a) + 1];
      ++first_[static_cast<std::size_t>(b) + 1];
    }
    for (std::size_t a = 0; a < nodes; ++a) first_[a + 1] += first_[a];
    list_.resize(first_.back());
    std::vector<std::size_t> next(first_.begin(), first_.end() - 1);
    for (const auto& [a, b] : pairs) {
      list_[next[static_cast<std::size_t>(a)]++] = b;
      list_[next[static_cast<std::size_t>(b)]++] = a;
    }
    std::size_t kept = 0;
    for (std::size_t a = 0; a < nodes; ++a) {
      const auto begin = list_.begin() + static_cast<std::ptrdiff_t>(first_[a]);
      const auto end = list_.begin() + static_cast<std::ptrdiff_t>(first_[a + 1]);
      std::sort(begin, end);
      const auto last = std::unique(begin, end);
      first_[a] = kept;
      kept = static_cast<std::size_t>(
          std::copy(begin, last, list_.begin() + static_cast<std::ptrdiff_t>(kept)) - list_.begin());
    }
    first_[nodes] = kept;
  }

  std::span<const Index> operator[](std::size_t node) const {
    return std::span(list_).subspan(first_[node], first_[node + 1] - first_[node]);
  }

 private:
  std::vector<std::size_t> first_;
  std::vector<Index> list_;
};

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
  const Neighbours list(s, matrix, result.at_node, picture.node.size());
  for (std::size_t a = 0; a < picture.node.size(); ++a) {
    for (const Index b : list[a]) {
      if (b <= static_cast<Index>(a) || is_diagonal(picture, list, static_cast<Index>(a), b)) continue;
      picture.links.emplace_back(static_cast<Index>(a), b);
    }
  }
  return result;
}

}  // namespace stanchion
