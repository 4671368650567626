#include "diagnose/bundle_merge.hpp"

#include <algorithm>
#include <map>

namespace stanchion {
namespace {

/// The vectors of both, on the nodes of either.
Bundle together(const Bundle& a, const Bundle& b, double active) {
  Bundle sum = a;
  std::map<Index, std::vector<std::pair<Index, std::vector<double>>>> of_node;  // node -> (row, values)
  const std::size_t count = a.x.count + b.x.count;
  const auto put = [&](const LocalVectors& x, std::size_t from) {
    for (std::size_t n = 0; n < x.nodes.size(); ++n) {
      auto& rows = of_node[x.nodes[n]];
      for (std::size_t i = x.first[n]; i < x.first[n + 1]; ++i) {
        auto at = std::find_if(rows.begin(), rows.end(), [&](const auto& r) { return r.first == x.rows[i]; });
        if (at == rows.end()) at = rows.insert(rows.end(), {x.rows[i], std::vector<double>(count, 0.0)});
        std::copy_n(x.row(i), x.count, at->second.begin() + static_cast<std::ptrdiff_t>(from));
      }
    }
  };
  put(a.x, 0);
  put(b.x, a.x.count);
  sum.x = LocalVectors{};
  sum.x.count = count;
  for (const auto& [node, rows] : of_node) {
    sum.x.nodes.push_back(node);
    sum.x.first.push_back(sum.x.rows.size());
    for (const auto& [row, values] : rows) {
      sum.x.rows.push_back(row);
      sum.x.value.insert(sum.x.value.end(), values.begin(), values.end());
    }
  }
  sum.x.first.push_back(sum.x.rows.size());
  sum.nodes = moving_nodes(sum.x, active);
  sum.separated = a.separated && b.separated;
  return sum;
}

bool share_nodes(const Bundle& a, const Bundle& b) {
  std::vector<Index> both;
  std::set_intersection(a.nodes.begin(), a.nodes.end(), b.nodes.begin(), b.nodes.end(),
                        std::back_inserter(both));
  return !both.empty();
}

/// Free against the ground rather than within itself.
bool not_held(const Bundle& bundle) {
  return bundle.whole_part && bundle.rigid.motions.size() > 1;
}

}  // namespace

void merge_chains(std::vector<Bundle>& bundles, double active) {
  constexpr Offset kNodesOfAMotion = 3;  // at most so many, for a chain
  std::vector<char> taken(bundles.size(), 0);
  std::vector<Bundle> kept;
  for (std::size_t b = 0; b < bundles.size(); ++b) {
    if (taken[b]) continue;
    std::vector<std::size_t> group{b};
    for (std::size_t g = 0; g < group.size() && !not_held(bundles[b]); ++g) {
      for (std::size_t c = b + 1; c < bundles.size(); ++c) {
        if (taken[c] || bundles[c].part != bundles[b].part || not_held(bundles[c])) continue;
        if (std::find(group.begin(), group.end(), c) != group.end()) continue;
        if (share_nodes(bundles[group[g]], bundles[c])) group.push_back(c);
      }
    }
    Bundle sum = bundles[b];
    for (std::size_t g = 1; g < group.size(); ++g) sum = together(sum, bundles[group[g]], active);
    const bool chain = group.size() > 1 && kNodesOfAMotion * static_cast<Offset>(sum.x.count) >=
                                               static_cast<Offset>(sum.nodes.size());
    if (!chain) {
      kept.push_back(std::move(bundles[b]));
      continue;
    }
    for (const std::size_t c : group) taken[c] = 1;
    sum.rigid = {};
    sum.whole_part = false;
    sum.chain = true;
    kept.push_back(std::move(sum));
  }
  bundles = std::move(kept);
}

void merge_marked(std::vector<Bundle>& bundles, const std::vector<char>& marked, double active) {
  std::map<Index, std::size_t> first;
  std::vector<Bundle> kept;
  for (std::size_t b = 0; b < bundles.size(); ++b) {
    if (!marked[b]) {
      kept.push_back(std::move(bundles[b]));
      continue;
    }
    const auto [at, added] = first.try_emplace(bundles[b].part, kept.size());
    if (added) {
      kept.push_back(std::move(bundles[b]));
    } else {
      kept[at->second] = together(kept[at->second], bundles[b], active);
    }
  }
  bundles = std::move(kept);
}

}  // namespace stanchion
