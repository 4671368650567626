#include "io/preflight_nodes.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <set>
#include <unordered_map>
#include <vector>

#include "io/coincident.hpp"
#include "io/joined_pairs.hpp"
#include "io/place.hpp"
#include "model/numbers.hpp"

namespace stanchion {
namespace {

constexpr std::size_t kPlacesShown = 5;
constexpr double kUsual = 0.9;       ///< of the nodes have a dof: the others lack it
constexpr double kFar = 10;          ///< times the size of the box of the middle nodes
constexpr double kSamePlace = 1e-9;  ///< of that box

std::string first_nodes(const std::vector<NodeNumber>& nodes) {
  std::string text;
  for (std::size_t k = 0; k < std::min(kPlacesShown, nodes.size()); ++k) {
    text += (k == 0 ? "" : ", ") + std::to_string(nodes[k]);
  }
  if (nodes.size() > kPlacesShown)
    text += " and " + grouped(static_cast<Offset>(nodes.size() - kPlacesShown)) + " more";
  return text;
}

/// Bits of ux uy uz rx ry rz.
int kind_of(const std::string& name) {
  static constexpr std::array<const char*, 6> kNames{"ux", "uy", "uz", "rx", "ry", "rz"};
  for (std::size_t k = 0; k < kNames.size(); ++k) {
    if (name == kNames[k]) return static_cast<int>(k);
  }
  return -1;
}

/// Nodes of the map that have a place.
struct PlacedNodes {
  std::vector<NodeNumber> number;
  std::vector<std::array<double, 3>> place;
  std::vector<NodeNumber> without;
  std::unordered_map<NodeNumber, std::size_t> index;
};

/// What only multipliers belong to has no place of its own.
PlacedNodes placed_nodes(const DofMap& dofs, const std::vector<char>& multiplies, const NodeTable& nodes) {
  PlacedNodes result;
  std::set<NodeNumber> missing;
  NodeNumber last = kNoNode;
  for (Index e = 0; e < dofs.equations(); ++e) {
    const NodeNumber node = dofs.node(e);
    if (node == kNoNode || node == last || multiplies[static_cast<std::size_t>(e)]) continue;
    last = node;
    const auto* place = nodes.find(node);
    if (place == nullptr) {
      missing.insert(node);
      continue;
    }
    if (!result.index.try_emplace(node, result.number.size()).second) continue;
    result.number.push_back(node);
    result.place.push_back(*place);
  }
  result.without.assign(missing.begin(), missing.end());
  return result;
}

/// Low and high of the middle 96 % along one axis.
std::pair<double, double> middle(const std::vector<std::array<double, 3>>& places, std::size_t axis) {
  std::vector<double> values;
  values.reserve(places.size());
  for (const auto& p : places) values.push_back(p[axis]);
  const std::size_t cut = std::max<std::size_t>(1, values.size() / 50);
  std::nth_element(values.begin(), values.begin() + static_cast<std::ptrdiff_t>(cut), values.end());
  const double low = values[cut];
  const std::size_t top = values.size() - 1 - cut;
  std::nth_element(values.begin(), values.begin() + static_cast<std::ptrdiff_t>(top), values.end());
  return {low, values[top]};
}

class NodeInspector {
 public:
  NodeInspector(const SymmetricMatrix& matrix, const DofMap& dofs, const std::vector<Index>& multipliers,
                const NodeTable& nodes, const std::string& path)
      : matrix_(matrix), dofs_(dofs), path_(path), multiplies_(static_cast<std::size_t>(matrix.rows), 0) {
    for (const Index e : multipliers) multiplies_[static_cast<std::size_t>(e)] = 1;
    nodes_ = placed_nodes(dofs, multiplies_, nodes);
  }

  Warnings run() {
    if (!nodes_.without.empty() && !nodes_.number.empty()) {
      warn("nodes-without-place",
           grouped(static_cast<Offset>(nodes_.without.size())) +
               " nodes of the dof map are not in the node table: " + first_nodes(nodes_.without) +
               ". List them, or their motions are tested without places");
    }
    if (nodes_.number.size() < 3) return std::move(warnings_);
    look_for_far();
    look_for_coincident();
    return std::move(warnings_);
  }

 private:
  void warn(const char* code, std::string message) { warnings_.push_back({code, std::move(message), path_}); }

  void look_for_far() {
    std::array<std::pair<double, double>, 3> box;
    for (std::size_t d = 0; d < 3; ++d) {
      box[d] = middle(nodes_.place, d);
      size_ = std::max(size_, box[d].second - box[d].first);
    }
    if (nodes_.number.size() < 10 || !(size_ > 0)) return;
    std::vector<NodeNumber> far;
    for (std::size_t k = 0; k < nodes_.number.size(); ++k) {
      const auto& p = nodes_.place[k];
      bool out = false;
      for (std::size_t d = 0; d < 3; ++d)
        out = out || p[d] < box[d].first - kFar * size_ || p[d] > box[d].second + kFar * size_;
      if (out) far.push_back(nodes_.number[k]);
    }
    if (far.empty()) return;
    warn("far-coordinates",
         grouped(static_cast<Offset>(far.size())) + (far.size() == 1 ? " node lies" : " nodes lie") +
             " far outside the rest: " + first_nodes(far) + ". Check coordinates and units");
  }

  void look_for_coincident() {
    auto pairs = coincident_places(nodes_.place, kSamePlace * (size_ > 0 ? size_ : extent_of(nodes_.place)));
    if (pairs.empty()) return;
    drop_connected(pairs);
    if (pairs.empty()) return;
    std::string text;
    for (std::size_t k = 0; k < std::min(kPlacesShown, pairs.size()); ++k) {
      text += (k == 0 ? "" : ", ") + std::to_string(nodes_.number[pairs[k].first]) + " with " +
              std::to_string(nodes_.number[pairs[k].second]);
    }
    if (pairs.size() > kPlacesShown)
      text += " and " + grouped(static_cast<Offset>(pairs.size() - kPlacesShown)) + " more";
    warn("coincident-nodes",
         grouped(static_cast<Offset>(pairs.size())) +
             (pairs.size() == 1 ? " pair of nodes lies" : " pairs of nodes lie") +
             " at one place with nothing between them: " + text +
             ". A seam that was not merged? Merge the nodes, or tie them, unless a gap is meant");
  }

  void drop_connected(std::vector<std::pair<std::size_t, std::size_t>>& pairs) const {
    JoinedPairs joined(pairs, nodes_.number.size());
    std::vector<std::ptrdiff_t> node_of(static_cast<std::size_t>(matrix_.rows), -1);
    for (Index e = 0; e < matrix_.rows; ++e) {
      if (multiplies_[static_cast<std::size_t>(e)]) continue;
      const auto at = nodes_.index.find(dofs_.node(e));
      if (at != nodes_.index.end() && joined.concerns(at->second))
        node_of[static_cast<std::size_t>(e)] = static_cast<std::ptrdiff_t>(at->second);
    }
    for (Index column = 0; column < matrix_.rows; ++column) {
      const auto a = node_of[static_cast<std::size_t>(column)];
      const bool acts = multiplies_[static_cast<std::size_t>(column)] != 0;
      if (a < 0 && !acts) continue;
      for (Offset k = matrix_.column_start[column]; k < matrix_.column_start[Offset{column} + 1]; ++k) {
        const Index row = matrix_.row[k];
        const auto b = node_of[static_cast<std::size_t>(row)];
        if (matrix_.value[k] == 0) continue;
        if (a >= 0 && b >= 0) joined.add_stiffness(static_cast<std::size_t>(a), static_cast<std::size_t>(b));
        if (acts && b >= 0) joined.add_constraint(column, static_cast<std::size_t>(b));
        if (a >= 0 && multiplies_[static_cast<std::size_t>(row)])
          joined.add_constraint(row, static_cast<std::size_t>(a));
      }
    }
    pairs = joined.apart();
  }

  const SymmetricMatrix& matrix_;
  const DofMap& dofs_;
  const std::string& path_;
  std::vector<char> multiplies_;  ///< by equation
  PlacedNodes nodes_;
  double size_ = 0;
  Warnings warnings_;
};

}  // namespace

Warnings inspect_partners(const DofMap& dofs, const std::string& dofs_path) {
  std::unordered_map<NodeNumber, unsigned> set_of;
  for (Index e = 0; e < dofs.equations(); ++e) {
    const int kind = kind_of(dofs.dof(e));
    if (kind >= 0 && dofs.node(e) != kNoNode) set_of[dofs.node(e)] |= 1U << kind;
  }
  std::array<std::size_t, 6> with{};
  for (const auto& [node, set] : set_of) {
    for (std::size_t k = 0; k < 6; ++k) with[k] += set >> k & 1U;
  }
  unsigned usual = 0;
  for (std::size_t k = 0; k < 6; ++k) {
    if (static_cast<double>(with[k]) > kUsual * static_cast<double>(set_of.size())) usual |= 1U << k;
  }
  std::vector<NodeNumber> lacking;
  for (const auto& [node, set] : set_of) {
    if ((usual & ~set) != 0) lacking.push_back(node);
  }
  if (lacking.empty()) return {};
  std::sort(lacking.begin(), lacking.end());
  return {{"missing-partners",
           grouped(static_cast<Offset>(lacking.size())) +
               (lacking.size() == 1 ? " node lacks" : " nodes lack") +
               " a dof that nearly all nodes have: " + first_nodes(lacking) +
               ". Right for supports whose equations were left out; otherwise equations were lost",
           dofs_path}};
}

bool places_collapse(const DofMap& dofs, const NodeTable& nodes) {
  const PlacedNodes placed =
      placed_nodes(dofs, std::vector<char>(static_cast<std::size_t>(dofs.equations()), 0), nodes);
  const auto& places = placed.place;
  const bool level = std::all_of(places.begin(), places.end(),
                                 [&](const std::array<double, 3>& p) { return p[2] == places[0][2]; });
  if (places.size() < 3 || !level) return false;
  std::vector<char> shared(places.size(), 0);
  for (const auto& [a, b] : coincident_places(places, kSamePlace * extent_of(places)))
    shared[a] = shared[b] = 1;
  return 2 * std::count(shared.begin(), shared.end(), 1) > static_cast<std::ptrdiff_t>(places.size());
}

Warnings inspect_nodes(const SymmetricMatrix& matrix, const DofMap& dofs,
                       const std::vector<Index>& multipliers, const NodeTable& nodes,
                       const std::string& nodes_path) {
  if (dofs.equations() != matrix.rows) return {};
  return NodeInspector(matrix, dofs, multipliers, nodes, nodes_path).run();
}

}  // namespace stanchion
