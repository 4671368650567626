#include "report/model_reduction.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <cstdint>
#include <limits>
#include <unordered_map>
#include <unordered_set>

namespace stanchion {
namespace {

using Triple = std::array<double, 3>;

constexpr std::uint64_t kFinest = 1U << 20U;  ///< cells along the longest edge, three of them fit in 64 bits
constexpr float kStill = 1e-3F;               ///< of the largest motion
constexpr std::size_t kLargest = 64;          ///< of a crowd, kept before any other of it
constexpr Index kNobody = -1;

/// Cubes over the box of all places.
class Grid {
 public:
  explicit Grid(const std::vector<Triple>& places) : low_(places.front()) {
    Triple high = low_;
    for (const Triple& p : places) {
      for (std::size_t d = 0; d < 3; ++d) {
        low_[d] = std::min(low_[d], p[d]);
        high[d] = std::max(high[d], p[d]);
      }
    }
    for (std::size_t d = 0; d < 3; ++d) longest_ = std::max(longest_, high[d] - low_[d]);
    if (!(longest_ > 0) || !std::isfinite(longest_)) longest_ = 1;
  }

  void divide(std::uint64_t parts) {
    parts_ = parts;
    cell_ = longest_ / static_cast<double>(parts);
  }
  double cell() const { return cell_; }

  std::uint64_t key(const Triple& p) const {
    std::uint64_t key = 0;
    for (std::size_t d = 0; d < 3; ++d) key = key * (kFinest + 1) + step(p, d);
    return key;
  }

  /// Squared, from the middle of its cube.
  double off_middle(const Triple& p) const {
    double sum = 0;
    for (std::size_t d = 0; d < 3; ++d) {
      const double middle = low_[d] + (static_cast<double>(step(p, d)) + 0.5) * cell_;
      sum += (p[d] - middle) * (p[d] - middle);
    }
    return sum;
  }

 private:
  std::uint64_t step(const Triple& p, std::size_t d) const {
    const double steps = (p[d] - low_[d]) / cell_;
    return steps > 0 ? std::min(static_cast<std::uint64_t>(std::min(steps, 1e9)), parts_ - 1) : 0;
  }

  Triple low_;
  double longest_ = 0, cell_ = 1;
  std::uint64_t parts_ = 1;
};

float size_of(const std::array<float, 3>& u) {
  return u[0] * u[0] + u[1] * u[1] + u[2] * u[2];
}

class Reducer {
 public:
  Reducer(const LocateOutcome& located, std::size_t most_nodes)
      : located_(located), picture_(located.picture), most_(most_nodes) {}

  ReducedModel run(std::size_t most_links) {
    const std::size_t nodes = picture_.place.size();
    stands_for_.assign(nodes, kNobody);
    if (nodes <= most_) {
      for (std::size_t i = 0; i < nodes; ++i) result_.kept.push_back(i);
    } else {
      keep_named();
      fill_cells();
      std::sort(result_.kept.begin(), result_.kept.end());
    }
    for (std::size_t k = 0; k < result_.kept.size(); ++k)
      stands_for_[result_.kept[k]] = static_cast<Index>(k);
    if (nodes > most_) stand_in();
    link(most_links);
    return std::move(result_);
  }

 private:
  bool keep(std::size_t node) {
    if (stands_for_[node] != kNobody) return false;
    stands_for_[node] = 0;
    result_.kept.push_back(node);
    return true;
  }

  void keep_named() {
    std::unordered_set<std::int64_t> named;
    for (const Direction& direction : located_.directions) {
      for (const DofShare& share : direction.nodes) {
        if (share.node) named.insert(*share.node);
      }
    }
    const std::size_t room = most_ / 4;
    for (std::size_t i = 0; i < picture_.node.size() && result_.kept.size() < room; ++i) {
      if (named.count(picture_.node[i]) > 0) keep(i);
    }
    std::size_t shapes = 0;
    for (const Direction& direction : located_.directions)
      shapes += direction.shape.size() == picture_.node.size() ? 1 : 0;
    for (const Direction& direction : located_.directions) {
      if (direction.shape.size() != picture_.node.size()) continue;
      keep_largest(room / shapes, kStill * kStill,
                   [&](std::size_t i) { return size_of(direction.shape[i]); });
    }
    if (located_.accuracy && located_.accuracy->by_node.size() == picture_.node.size()) {
      const auto& digits = located_.accuracy->by_node;
      keep_largest(most_ / 8, static_cast<float>(located_.accuracy->attention),
                   [&](std::size_t i) { return digits[i]; });
    }
  }

  /// At most `many` nodes whose value is above `least`: all of them, or the largest and then every so many,
  /// so that the crowd is as even as it was.
  template <class Value>
  void keep_largest(std::size_t many, float least, const Value& value) {
    std::vector<std::size_t> above;
    for (std::size_t i = 0; i < picture_.node.size(); ++i) {
      if (value(i) > least) above.push_back(i);
    }
    if (above.size() > many) {
      const std::size_t first = std::min(many, kLargest), rest = many - first;
      for (std::size_t k = 0; k < rest; ++k) keep(above[k * above.size() / rest]);
      std::partial_sort(
          above.begin(), above.begin() + static_cast<std::ptrdiff_t>(first), above.end(),
          [&](std::size_t a, std::size_t b) { return value(a) != value(b) ? value(a) > value(b) : a < b; });
      above.resize(first);
    }
    for (const std::size_t node : above) keep(node);
  }

  /// Whether the nodes lie in at most `room` cubes.
  bool fits(std::uint64_t parts, std::size_t room) {
    grid_.divide(parts);
    std::unordered_set<std::uint64_t> cubes;
    for (const Triple& place : picture_.place) {
      cubes.insert(grid_.key(place));
      if (cubes.size() > room) return false;
    }
    return true;
  }

  void fill_cells() {
    const std::size_t room = most_ - result_.kept.size();
    std::uint64_t coarse = 1, fine = kFinest;
    while (fine - coarse > 1) {
      const std::uint64_t middle = coarse + (fine - coarse) / 2;
      (fits(middle, room) ? coarse : fine) = middle;
    }
    grid_.divide(coarse);
    result_.cell = grid_.cell();
    std::unordered_map<std::uint64_t, std::size_t> best;
    for (std::size_t i = 0; i < picture_.place.size(); ++i) {
      const auto [at, first] = best.try_emplace(grid_.key(picture_.place[i]), i);
      if (!first && grid_.off_middle(picture_.place[i]) < grid_.off_middle(picture_.place[at->second]))
        at->second = i;
    }
    for (const auto& [cube, node] : best) keep(node);
    cubes_ = std::move(best);
  }

  /// Who is drawn in place of each node that is left out.
  void stand_in() {
    for (std::size_t i = 0; i < picture_.place.size(); ++i) {
      if (stands_for_[i] == kNobody) stands_for_[i] = stands_for_[cubes_.at(grid_.key(picture_.place[i]))];
    }
  }

  void link(std::size_t most_links) {
    auto& links = result_.links;
    for (const auto& [a, b] : picture_.links) {
      const Index i = stands_for_[static_cast<std::size_t>(a)], j = stands_for_[static_cast<std::size_t>(b)];
      if (i != j) links.emplace_back(std::min(i, j), std::max(i, j));
    }
    std::sort(links.begin(), links.end());
    links.erase(std::unique(links.begin(), links.end()), links.end());
    if (links.size() <= most_links) return;
    result_.links_left_out = links.size() - most_links;
    // Every so many, so that what is left out is spread over the model.
    std::vector<std::pair<Index, Index>> some;
    for (std::size_t k = 0; k < most_links; ++k) some.push_back(links[k * links.size() / most_links]);
    links = std::move(some);
  }

  const LocateOutcome& located_;
  const Picture& picture_;
  std::size_t most_;
  ReducedModel result_;
  std::vector<Index> stands_for_;  ///< by node of the picture: position in `kept`
  Grid grid_{picture_.place.empty() ? std::vector<Triple>{Triple{}} : picture_.place};
  std::unordered_map<std::uint64_t, std::size_t> cubes_;  ///< the node that each is drawn by
};

}  // namespace

ReducedModel reduce_model(const LocateOutcome& located, std::size_t most_nodes, std::size_t most_links) {
  return Reducer(located, most_nodes).run(most_links);
}

}  // namespace stanchion
