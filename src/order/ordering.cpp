#include "order/ordering.hpp"

#include <algorithm>
#include <cmath>
#include <future>
#include <system_error>
#include <vector>

#include "base/digest.hpp"
#include "order/column_counts.hpp"
#include "order/components.hpp"
#include "order/dissection.hpp"
#include "order/minimum_degree.hpp"
#include "order/permutation.hpp"

namespace stanchion {
namespace {

constexpr Index kDissectAbove = 120;      // smaller parts: minimum degree alone
constexpr Index kTryBothUpTo = 20'000;    // minimum degree is then a small part of the time
constexpr Offset kEntriesAlone = 50'000;  // so few are grouped before another thread has started
constexpr double kThinDegree = 3.0;       // chains and trees: dissection only adds fill
/// Minimum degree must save this share of the operations to be taken: under dissection the tree is balanced,
/// and error bounds of indefinite matrices are smaller.
constexpr double kSaving = 0.1;

/// Dissection takes as long as so many operations of a small factorization for each neighbour of a vertex
/// (measured); where minimum degree needs fewer than that, and a hundredth of a second's, it will do.
constexpr double kDissectionFlops = 6000, kSmallFlops = 5e7;

struct PartOrder {
  Buffer<Index> vertex_at;
  bool dissected = false;
};

Result<PartOrder> order_part(const Graph& part, bool other_order, int threads) {
  const double degree = static_cast<double>(part.adjacency.size()) / std::max<double>(1, part.vertices);
  const bool dissect = part.vertices > kDissectAbove && !other_order;
  const bool minimum = !dissect || part.vertices <= kTryBothUpTo || degree <= kThinDegree;
  PartOrder best;
  if (minimum) {
    auto order = minimum_degree(part);
    if (!order.ok()) return order.status();
    best.vertex_at = std::move(*order);
  }
  if (dissect) {
    const double flops = minimum ? predicted_flops(part, best.vertex_at) : INFINITY;
    const double of_dissection = kDissectionFlops * static_cast<double>(part.adjacency.size());
    if (flops < std::min(of_dissection, kSmallFlops)) return best;
    auto order = nested_dissection(part, threads);
    if (!order.ok()) return order.status();
    if (!minimum || predicted_flops(part, *order) * (1 - kSaving) < flops) {
      best = {std::move(*order), true};
    }
  }
  return best;
}

/// Equations that share both a node group and a neighbourhood group.
Grouping intersect(const Grouping& coarse, const Grouping& fine) {
  const Members members = members_of(coarse);
  Grouping grouping{0, Buffer<Index>(coarse.group_of.size())};
  std::vector<std::pair<Index, Index>> parts;  // of one node: neighbourhood group, equation
  for (Index g = 0; g < coarse.groups; ++g) {
    parts.clear();
    for (Offset m = members.start[g]; m < members.start[Offset{g} + 1]; ++m) {
      parts.emplace_back(fine.group_of[members.row[m]], members.row[m]);
    }
    std::sort(parts.begin(), parts.end());
    for (std::size_t k = 0; k < parts.size(); ++k) {
      if (k == 0 || parts[k].first != parts[k - 1].first) ++grouping.groups;
      grouping.group_of[parts[k].second] = grouping.groups - 1;
    }
  }
  return grouping;
}

/// Orders each connected part of `graph` and strings the parts together.
Result<Buffer<Index>> order_parts(const Graph& graph, const Components& components,
                                  const OrderingInput& input, Index& dissected) {
  std::vector<std::vector<Index>> members(static_cast<std::size_t>(components.count));
  Buffer<Index> local(graph.vertices);
  for (Index v = 0; v < graph.vertices; ++v) {
    auto& list = members[static_cast<std::size_t>(components.component_of[v])];
    local[v] = static_cast<Index>(list.size());
    list.push_back(v);
  }
  Buffer<Index> vertex_at(graph.vertices);
  Index used = 0;
  for (const auto& list : members) {
    if (list.size() == 1) {
      vertex_at[used++] = list.front();
      continue;
    }
    auto part = order_part(subgraph(graph, local, list.data(), static_cast<Index>(list.size())),
                           input.other_order, input.threads);
    if (!part.ok()) return part.status();
    dissected += part->dissected ? 1 : 0;
    for (const Index v : part->vertex_at) vertex_at[used++] = list[static_cast<std::size_t>(v)];
  }
  return vertex_at;
}

/// Of everything that order_parts() looks at. The first line changes whenever its rules do.
std::string digest_of(const Graph& graph, bool other_order) {
  Sha256 digest;
  digest.update(other_order ? "order 7, minimum degree" : "order 7");
  const auto add = [&digest](const auto& buffer) {
    const auto count = static_cast<std::uint64_t>(buffer.size());
    digest.update({reinterpret_cast<const char*>(&count), sizeof count});
    digest.update({reinterpret_cast<const char*>(buffer.data()),
                   static_cast<std::size_t>(buffer.size()) * sizeof(*buffer.data())});
  };
  add(graph.start);
  add(graph.adjacency);
  add(graph.weight);
  return digest.finish();
}

bool is_permutation_of(const Buffer<Index>& order, Index vertices) {
  if (order.size() != vertices) return false;
  std::vector<char> seen(static_cast<std::size_t>(vertices), 0);
  for (const Index v : order) {
    if (v < 0 || v >= vertices || seen[static_cast<std::size_t>(v)] != 0) return false;
    seen[static_cast<std::size_t>(v)] = 1;
  }
  return true;
}

/// As order_parts(), or what it found before.
Result<Buffer<Index>> order_or_recall(const Graph& graph, const Components& components,
                                      const OrderingInput& input, Elimination& elimination) {
  if (input.known == nullptr) {
    return order_parts(graph, components, input, elimination.dissected);
  }
  const std::string key = digest_of(graph, input.other_order);
  if (auto found = input.known->find(key); found && is_permutation_of(found->vertex_at, graph.vertices)) {
    elimination.known = true;
    elimination.dissected = found->dissected;
    return std::move(found->vertex_at);
  }
  auto order = order_parts(graph, components, input, elimination.dissected);
  if (!order.ok()) {
    input.known->give_up();
    return order.status();
  }
  input.known->keep(key, {order->clone(), elimination.dissected});
  return order;
}

/// Rows whose diagonal is zero, or `weak`.
std::vector<char> zero_diagonals(const SymmetricMatrix& pattern, std::span<const char> weak) {
  std::vector<char> zero(static_cast<std::size_t>(pattern.rows), 1);
  for (Index j = 0; j < pattern.rows; ++j) {
    const Offset first = pattern.column_start[j];
    if (first < pattern.column_start[Offset{j} + 1] && pattern.row[first] == j && pattern.value[first] != 0) {
      zero[static_cast<std::size_t>(j)] = weak.empty() ? 0 : weak[static_cast<std::size_t>(j)];
    }
  }
  return zero;
}

/// Groups that the structure cannot tell apart, inside the groups that were ordered, and their graph.
struct ExactStructure {
  Grouping grouping;
  Graph graph;
};

/// work() in a thread of its own if one can be had, else when the result is asked for.
template <class Work>
auto begin(bool in_background, const Work& work) {
  try {
    return std::async(in_background ? std::launch::async : std::launch::deferred, work);
  } catch (const std::system_error&) {
    return std::async(std::launch::deferred, work);
  }
}

}  // namespace

Result<Elimination> order_equations(const OrderingInput& input) {
  const SymmetricMatrix& pattern = *input.pattern;
  const std::vector<char> zero = zero_diagonals(pattern, input.weak_diagonal);
  const bool joins = input.zero_diagonals_join && std::find(zero.begin(), zero.end(), 1) != zero.end();
  const bool nodes_known = !input.node_of.empty();
  const bool coarsens = nodes_known || joins;  // else the graph that is ordered is the exact one
  Grouping alike, coarse;
  if (!nodes_known) alike = group_by_neighbourhood(pattern);
  coarse = nodes_known ? group_by_node(pattern.rows, input.node_of)
                       : Grouping{alike.groups, alike.group_of.clone()};
  if (joins) coarse = join_zero_diagonals(pattern, std::move(coarse), zero);

  // Eliminate node by node, but keep the exact structure inside a node (a plate's membrane and bending
  // parts): found by another thread meanwhile, for the first cut of a dissection is one thread's work.
  std::future<ExactStructure> exact;
  if (coarsens) {
    exact = begin(input.threads > 1 && pattern.row.size() > kEntriesAlone, [&pattern, &coarse, &alike] {
      if (alike.group_of.empty()) alike = group_by_neighbourhood(pattern);
      ExactStructure found{intersect(coarse, alike), {}};
      found.graph = quotient_graph(pattern, found.grouping);
      return found;
    });
  }
  Elimination elimination;
  Graph coarse_graph = quotient_graph(pattern, coarse);
  const Components components = connected_components(coarse_graph);
  elimination.components = components.count;
  auto coarse_order = order_or_recall(coarse_graph, components, input, elimination);
  if (!coarse_order.ok()) return coarse_order.status();
  if (!coarsens) {
    elimination.graph = std::move(coarse_graph);
    elimination.grouping = std::move(coarse);
    elimination.vertex_at = std::move(*coarse_order);
    elimination.component_of_vertex = components.component_of.clone();
    return elimination;
  }
  ExactStructure structure = exact.get();
  elimination.grouping = std::move(structure.grouping);
  elimination.graph = std::move(structure.graph);
  const Buffer<Index> coarse_position = inverse_of(*coarse_order);
  Buffer<Index> coarse_of(elimination.grouping.groups);
  for (Index i = 0; i < pattern.rows; ++i) coarse_of[elimination.grouping.group_of[i]] = coarse.group_of[i];
  elimination.vertex_at = Buffer<Index>(elimination.grouping.groups);
  for (Index v = 0; v < elimination.grouping.groups; ++v) elimination.vertex_at[v] = v;
  std::stable_sort(elimination.vertex_at.begin(), elimination.vertex_at.end(), [&](Index a, Index b) {
    return coarse_position[coarse_of[a]] < coarse_position[coarse_of[b]];
  });
  elimination.component_of_vertex = Buffer<Index>(elimination.grouping.groups);
  for (Index v = 0; v < elimination.grouping.groups; ++v) {
    elimination.component_of_vertex[v] = components.component_of[coarse_of[v]];
  }
  return elimination;
}

}  // namespace stanchion
