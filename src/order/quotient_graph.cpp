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
Grouping renumber(Index rows, const Buffer<Index>& label, Index labels) {
  Grouping grouping{0, Buffer<Index>(rows)};
  Buffer<Index> number(labels, -1);
  for (Index i = 0; i < rows; ++i) {
    Index& slot = number[label[i]];
    if (slot < 0) slot = grouping.groups++;
    grouping.group_of[i] = slot;
  }
  return grouping;
}

/// Whether every row of column `j` is one of column `first`, told from the end of that column; equations of
/// one node mostly have the same neighbours. False at times where it is so.
bool repeats(const SymmetricMatrix& pattern, Index j, Index first) {
  const Index* begin = pattern.row.data() + pattern.column_start[first];
  const Index* end = pattern.row.data() + pattern.column_start[Offset{first} + 1];
  const Index* mine = pattern.row.data() + pattern.column_start[j];
  const Offset length = pattern.column_start[Offset{j} + 1] - pattern.column_start[j];
  return length <= end - begin && std::equal(mine, mine + length, end - length);
}

}  // namespace

Members members_of(const Grouping& grouping) {
  const auto rows = static_cast<Index>(grouping.group_of.size());
  Members members{Buffer<Offset>(Offset{grouping.groups} + 1, 0), Buffer<Index>(rows)};
  for (Index i = 0; i < rows; ++i) ++members.start[Offset{grouping.group_of[i]} + 1];
  for (Index g = 0; g < grouping.groups; ++g) members.start[Offset{g} + 1] += members.start[g];
  Buffer<Offset> next = members.start.clone();
  for (Index i = 0; i < rows; ++i) members.row[next[grouping.group_of[i]]++] = i;
  return members;
}

Grouping group_by_neighbourhood(const SymmetricMatrix& pattern) {
  const Index n = pattern.rows;
  Buffer<std::uint64_t> hash(n);
  for (Index i = 0; i < n; ++i) hash[i] = mix(static_cast<std::uint64_t>(i));
  const Buffer<std::uint64_t> own = hash.clone();
  for (Index j = 0; j < n; ++j) {
    std::uint64_t sum = 0;
    for (Offset k = pattern.column_start[j]; k < pattern.column_start[Offset{j} + 1]; ++k) {
      const Index i = pattern.row[k];
      if (i == j) continue;
      hash[i] += own[j];
      sum += own[i];
    }
    hash[j] += sum;
  }
  // Equal hashes share a slot of an open table, at most half full; groups are numbered by first appearance.
  Grouping grouping{0, Buffer<Index>(n)};
  const std::size_t slots = std::bit_ceil(2 * static_cast<std::size_t>(n) + 1);
  Buffer<Index> first(static_cast<Offset>(slots), -1);
  for (Index i = 0; i < n; ++i) {
    const std::uint64_t mine = hash[i];
    auto slot = static_cast<Offset>(mine & (slots - 1));
    while (first[slot] >= 0 && hash[first[slot]] != mine) {
      slot = static_cast<Offset>(static_cast<std::size_t>(slot + 1) & (slots - 1));
    }
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
    Buffer<Index> label(rows);
    std::copy(node_of.begin(), node_of.end(), label.begin());
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
  Buffer<Index> label(rows);
  Index labels = 0;
  for (std::size_t k = 0; k < order.size(); ++k) {
    const Index node = node_of[static_cast<std::size_t>(order[k])];
    const bool same = k > 0 && node >= 0 && node == node_of[static_cast<std::size_t>(order[k - 1])];
    if (!same) ++labels;
    label[order[k]] = labels - 1;
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
  Buffer<Index> label = grouping.group_of.clone();
  for (Index i = 0; i < n; ++i) {
    if (partner[static_cast<std::size_t>(i)] != kNone) {
      label[i] = grouping.group_of[partner[static_cast<std::size_t>(i)]];
    }
  }
  return renumber(n, label, grouping.groups);
}

Graph quotient_graph(const SymmetricMatrix& pattern, const Grouping& grouping) {
  const Index groups = grouping.groups;
  const Members members = members_of(grouping);
  // Pass 1: the neighbours of each group as seen from the lower triangle, and how many each group gets when
  // every edge is entered from both ends (so at most twice).
  Buffer<Index> found(pattern.row.size());
  Offset used = 0;
  Buffer<Offset> found_start(Offset{groups} + 1, 0);
  std::vector<Index> seen(static_cast<std::size_t>(groups), -1);
  Buffer<Offset> count(Offset{groups} + 1, 0);
  for (Index g = 0; g < groups; ++g) {
    Index scanned = -1;
    for (Offset m = members.start[g]; m < members.start[Offset{g} + 1]; ++m) {
      const Index j = members.row[m];
      if (scanned >= 0 && repeats(pattern, j, scanned)) continue;
      scanned = j;
      for (Offset k = pattern.column_start[j]; k < pattern.column_start[Offset{j} + 1]; ++k) {
        const Index h = grouping.group_of[pattern.row[k]];
        if (h == g || seen[static_cast<std::size_t>(h)] == g) continue;
        seen[static_cast<std::size_t>(h)] = g;
        found[used++] = h;
        ++count[Offset{h} + 1];
      }
    }
    found_start[Offset{g} + 1] = used;
    count[Offset{g} + 1] += found_start[Offset{g} + 1] - found_start[g];
  }
  for (Index g = 0; g < groups; ++g) count[Offset{g} + 1] += count[g];
  Buffer<Index> both(count[groups]);
  Buffer<Offset> next = count.clone();
  for (Index g = 0; g < groups; ++g) {
    for (Offset e = found_start[g]; e < found_start[Offset{g} + 1]; ++e) {
      const Index h = found[e];
      both[next[g]++] = h;
      both[next[h]++] = g;
    }
  }
  found.reset();
  // Pass 2: drop the pairs found from both sides.
  Graph graph{groups, Buffer<Offset>(Offset{groups} + 1), std::move(both), Buffer<Index>(groups)};
  std::fill(seen.begin(), seen.end(), -1);
  used = 0;
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
