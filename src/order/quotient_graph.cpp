#include "order/quotient_graph.hpp"

#include <algorithm>
#include <bit>
#include <cstdint>
#include <limits>
#include <numeric>
#include <vector>

namespace stanchion {
namespace {

constexpr Offset kNumbersPerRow = 4;  // a table over all node numbers is still small

/// A fixed pseudo-random 64-bit value per equation (the finaliser of a counter-based generator).
std::uint64_t mix(std::uint64_t x) {
  x += 0x9e3779b97f4a7c15ULL;
  x = (x ^ (x >> 30)) * 0xbf58476d1ce4e5b9ULL;
  x = (x ^ (x >> 27)) * 0x94d049bb133111ebULL;
  return x ^ (x >> 31);
}

/// Renumbers arbitrary group labels by first appearance.
Grouping renumber(Index rows, const std::vector<Index>& label, Index labels) {
  Grouping grouping{0, Buffer<Index>(rows)};
  std::vector<Index> number(static_cast<std::size_t>(labels), -1);
  for (Index i = 0; i < rows; ++i) {
    Index& slot = number[static_cast<std::size_t>(label[static_cast<std::size_t>(i)])];
    if (slot < 0) slot = grouping.groups++;
    grouping.group_of[i] = slot;
  }
  return grouping;
}

/// Rows listed group by group: start (groups + 1) and rows.
struct Members {
  Buffer<Offset> start;
  Buffer<Index> row;
};

Members members_of(const Grouping& grouping) {
  const auto rows = static_cast<Index>(grouping.group_of.size());
  Members members{Buffer<Offset>(Offset{grouping.groups} + 1, 0), Buffer<Index>(rows)};
  for (Index i = 0; i < rows; ++i) ++members.start[Offset{grouping.group_of[i]} + 1];
  for (Index g = 0; g < grouping.groups; ++g) members.start[Offset{g} + 1] += members.start[g];
  Buffer<Offset> next = members.start.clone();
  for (Index i = 0; i < rows; ++i) members.row[next[grouping.group_of[i]]++] = i;
  return members;
}

}  // namespace

Grouping group_by_neighbourhood(const SymmetricMatrix& pattern) {
  const Index n = pattern.rows;
  std::vector<std::uint64_t> hash(static_cast<std::size_t>(n));
  for (Index i = 0; i < n; ++i) hash[static_cast<std::size_t>(i)] = mix(static_cast<std::uint64_t>(i));
  const std::vector<std::uint64_t> own = hash;
  for (Index j = 0; j < n; ++j) {
    std::uint64_t sum = 0;
    for (Offset k = pattern.column_start[j]; k < pattern.column_start[Offset{j} + 1]; ++k) {
      const Index i = pattern.row[k];
      if (i == j) continue;
      hash[static_cast<std::size_t>(i)] += own[static_cast<std::size_t>(j)];
      sum += own[static_cast<std::size_t>(i)];
    }
    hash[static_cast<std::size_t>(j)] += sum;
  }
  // Equal hashes share a slot of an open table, at most half full; groups are numbered by first appearance.
  Grouping grouping{0, Buffer<Index>(n)};
  const std::size_t slots = std::bit_ceil(2 * static_cast<std::size_t>(n) + 1);
  std::vector<Index> first(slots, -1);
  for (Index i = 0; i < n; ++i) {
    const std::uint64_t mine = hash[static_cast<std::size_t>(i)];
    std::size_t slot = mine & (slots - 1);
    while (first[slot] >= 0 && hash[static_cast<std::size_t>(first[slot])] != mine)
      slot = (slot + 1) & (slots - 1);
    if (first[slot] < 0) {
      first[slot] = i;
      grouping.group_of[i] = grouping.groups++;
    } else {
      grouping.group_of[i] = grouping.group_of[first[slot]];
    }
  }
  return grouping;
}

Grouping group_by_node(Index rows, std::span<const Index> node_of) {
  const auto count = static_cast<std::size_t>(rows);
  const Offset numbers = rows == 0 ? 0 : Offset{*std::max_element(node_of.begin(), node_of.end())} + 1;
  if (numbers <= kNumbersPerRow * rows && numbers + rows <= std::numeric_limits<Index>::max()) {
    // Node numbers are labels as they are; equations that belong to none get labels of their own above them.
    std::vector<Index> label(node_of.begin(), node_of.end());
    auto labels = static_cast<Index>(std::max<Offset>(numbers, 0));
    for (Index& mine : label) {
      if (mine < 0) mine = labels++;
    }
    return renumber(rows, label, labels);
  }
  std::vector<Index> order(count);
  std::iota(order.begin(), order.end(), 0);
  std::stable_sort(order.begin(), order.end(), [&](Index a, Index b) {
    return node_of[static_cast<std::size_t>(a)] < node_of[static_cast<std::size_t>(b)];
  });
  std::vector<Index> label(count);
  Index labels = 0;
  for (std::size_t k = 0; k < order.size(); ++k) {
    const Index node = node_of[static_cast<std::size_t>(order[k])];
    const bool same = k > 0 && node >= 0 && node == node_of[static_cast<std::size_t>(order[k - 1])];
    if (!same) ++labels;
    label[static_cast<std::size_t>(order[k])] = labels - 1;
  }
  return renumber(rows, label, labels);
}

Grouping join_zero_diagonals(const SymmetricMatrix& pattern, Grouping grouping,
                             std::span<const char> zero_diagonal) {
  const Index n = pattern.rows;
  constexpr Index kNone = -1;
  std::vector<Index> partner(static_cast<std::size_t>(n), kNone);
  std::vector<char> taken(static_cast<std::size_t>(n), 0);
  /// `both_zero`: of two such equations, else of one and another.
  const auto try_pair = [&](Index zero, Index other, bool both_zero) {
    const auto z = static_cast<std::size_t>(zero), o = static_cast<std::size_t>(other);
    if (!zero_diagonal[z] || (zero_diagonal[o] != 0) != both_zero || zero == other) return;
    if (partner[z] != kNone || taken[z] || partner[o] != kNone || taken[o]) return;
    partner[z] = other;
    taken[o] = 1;
  };
  for (const bool both_zero : {false, true}) {
    for (Index j = 0; j < n; ++j) {
      for (Offset k = pattern.column_start[j]; k < pattern.column_start[Offset{j} + 1]; ++k) {
        if (pattern.value[k] == 0) continue;
        try_pair(j, pattern.row[k], both_zero);
        try_pair(pattern.row[k], j, both_zero);
      }
    }
  }
  std::vector<Index> label(grouping.group_of.begin(), grouping.group_of.end());
  for (Index i = 0; i < n; ++i) {
    if (partner[static_cast<std::size_t>(i)] != kNone) {
      label[static_cast<std::size_t>(i)] = grouping.group_of[partner[static_cast<std::size_t>(i)]];
    }
  }
  return renumber(n, label, grouping.groups);
}

Graph quotient_graph(const SymmetricMatrix& pattern, const Grouping& grouping) {
  const Index groups = grouping.groups;
  const Members members = members_of(grouping);
  // Pass 1: unique half edges as seen from the lower triangle, each in both directions (so at most twice).
  std::vector<Index> half_from, half_to;
  std::vector<Index> seen(static_cast<std::size_t>(groups), -1);
  Buffer<Offset> count(Offset{groups} + 1, 0);
  for (Index g = 0; g < groups; ++g) {
    for (Offset m = members.start[g]; m < members.start[Offset{g} + 1]; ++m) {
      const Index j = members.row[m];
      for (Offset k = pattern.column_start[j]; k < pattern.column_start[Offset{j} + 1]; ++k) {
        const Index h = grouping.group_of[pattern.row[k]];
        if (h == g || seen[static_cast<std::size_t>(h)] == g) continue;
        seen[static_cast<std::size_t>(h)] = g;
        half_from.push_back(g);
        half_to.push_back(h);
        ++count[Offset{g} + 1];
        ++count[Offset{h} + 1];
      }
    }
  }
  for (Index g = 0; g < groups; ++g) count[Offset{g} + 1] += count[g];
  Buffer<Index> both(count[groups]);
  Buffer<Offset> next = count.clone();
  for (std::size_t e = 0; e < half_from.size(); ++e) {
    both[next[half_from[e]]++] = half_to[e];
    both[next[half_to[e]]++] = half_from[e];
  }
  // Pass 2: drop the pairs found from both sides.
  Graph graph{groups, Buffer<Offset>(Offset{groups} + 1), std::move(both), Buffer<Index>(groups)};
  std::fill(seen.begin(), seen.end(), -1);
  Offset used = 0;
  graph.start[0] = 0;
  for (Index g = 0; g < groups; ++g) {
    for (Offset k = count[g]; k < count[Offset{g} + 1]; ++k) {
      const Index h = graph.adjacency[k];
      if (seen[static_cast<std::size_t>(h)] == g) continue;
      seen[static_cast<std::size_t>(h)] = g;
      graph.adjacency[used++] = h;
    }
    graph.start[Offset{g} + 1] = used;
    graph.weight[g] = static_cast<Index>(members.start[Offset{g} + 1] - members.start[g]);
  }
  graph.adjacency.shrink(used);
  return graph;
}

}  // namespace stanchion
