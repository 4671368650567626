#include "diagnose/negative_links.hpp"

#include <algorithm>
#include <cmath>
#include <map>

#include "diagnose/small_eigen.hpp"

namespace stanchion {
namespace {

constexpr double kRankOne = 1e-8;       ///< what a second eigenvalue may be of the first
constexpr double kNothingLeft = 1e-6;   ///< 1 + t w^T A^-1 w in size: without the link the motion is free
constexpr std::size_t kMostTried = 32;  ///< by the factor

using NodePair = std::pair<Index, Index>;
/// Entries between the six dofs of two nodes, unscaled; `other` when a dof of another kind takes part.
struct PairBlock {
  std::array<double, 36> entry{};
  bool other = false;
};

class LinkFinder {
 public:
  /// `value`: x^T A x of each of the vectors, negative.
  LinkFinder(const Structure& s, const ShiftedMatrix& matrix, const Columns& x,
             const std::vector<double>& value)
      : s_(s), matrix_(matrix), x_(x), value_(value) {}

  std::vector<NegativeLink> run() {
    each_pair([&](Index i, Index j, Index a, Index b, double value) {
      const DofKind kind = kind_of(i);
      const bool against = kind == kind_of(j) && kind <= DofKind::kRz && value > 0;
      if (against && may_matter(i, j, value)) blocks_.try_emplace(std::minmax(a, b));
    });
    if (blocks_.empty()) return {};
    each_pair([&](Index i, Index j, Index a, Index b, double value) { put(i, j, a, b, value); });
    std::vector<NegativeLink> links;
    for (const auto& [nodes, block] : blocks_) offer(nodes, block, links);
    return links;
  }

 private:
  DofKind kind_of(Index row) const { return s_.kind[static_cast<std::size_t>(row)]; }

  template <class Use>
  void each_pair(const Use& use) const {
    const MatrixFamily& family = *matrix_.family;
    for (Index j = 0; j < family.rows; ++j) {
      const Index b = s_.node_of[static_cast<std::size_t>(j)];
      if (kind_of(j) > DofKind::kRz || s_.axes[static_cast<std::size_t>(b)] != nullptr) continue;
      for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
        const Index i = family.row[k], a = s_.node_of[static_cast<std::size_t>(i)];
        if (a == b || s_.axes[static_cast<std::size_t>(a)] != nullptr) continue;
        const double value = matrix_.entry(k, i, j);
        if (value != 0) use(i, j, a, b, value / ((*matrix_.scale)[i] * (*matrix_.scale)[j]));
      }
    }
  }

  /// A link that makes a vector's energy negative holds more than what it lacks; at least a ninth of that in
  /// one of its three directions.
  bool may_matter(Index i, Index j, double stiffness) const {
    for (std::size_t v = 0; v < value_.size(); ++v) {
      const double apart = (*matrix_.scale)[i] * x_.row(i)[v] - (*matrix_.scale)[j] * x_.row(j)[v];
      if (9 * stiffness * apart * apart > -value_[v]) return true;
    }
    return false;
  }

  void put(Index i, Index j, Index a, Index b, double value) {
    const auto at = blocks_.find(std::minmax(a, b));
    if (at == blocks_.end()) return;
    auto p = static_cast<std::size_t>(kind_of(i)), q = static_cast<std::size_t>(kind_of(j));
    if (p > 5 || q > 5) {
      at->second.other = true;
      return;
    }
    if (a > b) std::swap(p, q);  // rows are the dofs of the lower node
    at->second.entry[p * 6 + q] = value;
  }

  void offer(const NodePair& nodes, const PairBlock& block, std::vector<NegativeLink>& links) const {
    if (block.other) return;
    double inside[2] = {0, 0}, outside = 0;  // translations, rotations, across
    for (std::size_t p = 0; p < 6; ++p) {
      for (std::size_t q = 0; q < 6; ++q) {
        double& most = p / 3 != q / 3 ? outside : inside[p / 3];
        most = std::max(most, std::fabs(block.entry[p * 6 + q]));
      }
    }
    if (outside != 0 || (inside[0] != 0) == (inside[1] != 0)) return;
    const bool turns = inside[1] != 0;
    const std::size_t first = turns ? 3 : 0;
    std::vector<double> c(9);
    for (std::size_t p = 0; p < 3; ++p) {
      for (std::size_t q = 0; q < 3; ++q) {
        const double v = block.entry[(first + p) * 6 + first + q];
        if (std::fabs(v - block.entry[(first + q) * 6 + first + p]) > kRankOne * inside[turns]) return;
        c[p * 3 + q] = v;
      }
    }
    const SmallEigen eigen = small_eigen(c, 3);
    const double largest = eigen.values[2];
    if (!(largest > 0) || std::fabs(eigen.values[0]) > kRankOne * largest ||
        std::fabs(eigen.values[1]) > kRankOne * largest)
      return;
    NegativeLink link{{nodes.first, nodes.second}, turns, {}, {}, -largest};
    double lead = 0;  // the direction's largest component is positive
    for (std::size_t d = 0; d < 3; ++d) {
      link.direction[d] = eigen.vectors[d * 3 + 2];
      if (std::fabs(link.direction[d]) > std::fabs(lead) + 1e-9) lead = link.direction[d];
    }
    for (double& d : link.direction) d = lead < 0 ? -d : d;
    for (int side = 0; side < 2; ++side) {
      for (const Index row : s_.rows_of(link.node[side])) {
        const auto kind = static_cast<std::size_t>(kind_of(row));
        if (kind < first || kind >= first + 3 || link.direction[kind - first] == 0) continue;
        link.apart.emplace_back(row,
                                side == 0 ? link.direction[kind - first] : -link.direction[kind - first]);
      }
    }
    links.push_back(std::move(link));
  }

  const Structure& s_;
  const ShiftedMatrix& matrix_;
  const Columns& x_;
  const std::vector<double>& value_;
  std::map<NodePair, PairBlock> blocks_;
};

}  // namespace

double NegativeLink::energy(const ShiftedMatrix& matrix, const Columns& x, Index column) const {
  double sum = 0;
  for (const auto& [row, cosine] : apart) sum += cosine * (*matrix.scale)[row] * x.row(row)[column];
  return -stiffness * sum * sum;
}

std::vector<NegativeLink> find_negative_links(const Structure& s, const ShiftedMatrix& matrix,
                                              const Columns& x, const std::vector<double>& value,
                                              KeptFactor& factor) {
  if (!s.named || value.empty()) return {};
  std::vector<NegativeLink> links = LinkFinder(s, matrix, x, value).run();
  std::vector<std::pair<double, std::size_t>> order;
  for (std::size_t k = 0; k < links.size(); ++k) {
    double most = 0;
    for (Index v = 0; v < static_cast<Index>(value.size()); ++v)
      most = std::max(most, links[k].energy(matrix, x, v));
    order.emplace_back(-most, k);
  }
  std::sort(order.begin(), order.end());
  if (order.size() > kMostTried) order.resize(kMostTried);
  std::vector<NegativeLink> tried;
  for (const auto& [energy, k] : order) tried.push_back(std::move(links[k]));
  if (tried.empty()) return tried;
  // n-(A + t w w^T) = n-(A) - 1 exactly when 1 + t w^T A^-1 w < 0, t > 0.
  Columns w(s.rows, whole_blocks(static_cast<Index>(tried.size())));
  for (std::size_t k = 0; k < tried.size(); ++k) {
    for (const auto& [row, cosine] : tried[k].apart) w.row(row)[k] = cosine * (*matrix.scale)[row];
  }
  factor.solve(w);
  for (std::size_t k = 0; k < tried.size(); ++k) {
    double give = 0;
    for (const auto& [row, cosine] : tried[k].apart) give += cosine * (*matrix.scale)[row] * w.row(row)[k];
    const double without = 1 - tried[k].stiffness * give, turned = 1 - 2 * tried[k].stiffness * give;
    tried[k].essential = std::fabs(without) <= kNothingLeft && turned < 0;
    tried[k].decisive = without < -kNothingLeft || tried[k].essential;
  }
  return tried;
}

}  // namespace stanchion
