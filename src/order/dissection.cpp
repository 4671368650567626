#include "order/dissection.hpp"

#include <algorithm>
#include <array>
#include <cstdlib>
#include <limits>
#include <memory>
#include <thread>
#include <vector>

#include "base/threads.hpp"
#include "order/components.hpp"
#include "order/metis_graph.hpp"
#include "order/minimum_degree.hpp"
#include "order/separator.hpp"

namespace stanchion {
namespace {

constexpr Index kWholeUpTo = 500;           // vertices that are ordered without a cut of ours
constexpr Index kQuickWholeUpTo = 2'000;    // the same of surfaces and of parts cut by cliques
constexpr Index kScatteredWholeUpTo = 250;  // minimum degree breaks ties badly where numbers are scattered
constexpr int kLevels =
    4;  // of cuts: 16 parts keep as many threads busy; thin and quick parts are cut further
constexpr double kThin = 1.5;  // most (separator vertices)^2 a vertex of a surface; bodies have 2 to 50

/// A part of the graph, to fill the positions from `place` on.
struct Part {
  Graph graph;
  std::vector<Index> vertices;  ///< in the whole graph, ascending
  Index place = 0;
  bool whole = false;      ///< not to be cut further
  bool thin = false;       ///< a piece of a surface or a line: the cut that made it was short
  bool quick = false;      ///< a cut costs little: the one that made it was by cliques or levels
  double level_cost = 0;   ///< of the cut that made it, see Separation
  bool scattered = false;  ///< neighbours have far-off numbers
};

/// Orders a part by METIS and writes its vertices to their positions.
Status order_whole(const Part& part, Buffer<Index>& vertex_at) {
  MetisGraph graph(part.graph);
  std::vector<idx_t> order(part.vertices.size()), inverse(part.vertices.size());
  const int status = METIS_NodeND(&graph.vertices, graph.start.data(), graph.adjacency.data(),
                                  graph.weight.data(), graph.options.data(), order.data(), inverse.data());
  if (status != METIS_OK) return metis_out_of_memory();
  for (std::size_t k = 0; k < order.size(); ++k) {
    vertex_at[part.place + static_cast<Index>(k)] = part.vertices[static_cast<std::size_t>(order[k])];
  }
  return {};
}

/// Orders a thin part by minimum degree with its neighbours in the `whole` graph around it, which are
/// eliminated later. A tenth of METIS's time and on surfaces as few operations, on bodies a fifth more.
/// `local` has a negative number for every vertex of the whole graph, and is left so.
Status order_thin(const Graph& whole, const Part& part, Buffer<Index>& local, Buffer<Index>& vertex_at) {
  std::vector<Index> members = part.vertices;
  const auto inside = static_cast<Index>(members.size());
  for (Index k = 0; k < inside; ++k) local[members[static_cast<std::size_t>(k)]] = k;
  for (const Index v : part.vertices) {
    for (Offset e = whole.start[v]; e < whole.start[Offset{v} + 1]; ++e) {
      const Index neighbour = whole.adjacency[e];
      if (local[neighbour] >= 0) continue;
      local[neighbour] = static_cast<Index>(members.size());
      members.push_back(neighbour);
    }
  }
  const Graph graph = subgraph(whole, local, members.data(), static_cast<Index>(members.size()));
  for (const Index v : members) local[v] = -1;
  auto order = minimum_degree_within(graph, inside);
  if (!order.ok()) return order.status();
  for (Index k = 0; k < inside; ++k) {
    vertex_at[part.place + k] = part.vertices[static_cast<std::size_t>((*order)[k])];
  }
  return {};
}

/// Whether the numbers of neighbours differ by a tenth of all on the mean: by a third in random numbering,
/// and by the square root of the vertices where a surface is numbered row by row.
bool is_scattered(const Graph& graph) {
  Offset distances = 0;
  for (Index v = 0; v < graph.vertices; ++v) {
    for (Offset e = graph.start[v]; e < graph.start[Offset{v} + 1]; ++e) {
      distances += std::abs(graph.adjacency[e] - v);
    }
  }
  return 10 * distances > graph.adjacency.size() * graph.vertices;
}

/// What a cut leaves: both sides, or the part itself as a whole one when there is no cut worth making.
/// The separator's positions are the part's last.
Status cut(Part part, std::vector<Part>& left_over, Buffer<Index>& vertex_at) {
  auto separation = separate(part.graph, part.level_cost);
  if (!separation.ok()) return separation.status();
  std::array<std::vector<Index>, 3> chosen;
  for (std::size_t k = 0; k < separation->side.size(); ++k) {
    chosen[static_cast<std::size_t>(separation->side[k])].push_back(static_cast<Index>(k));
  }
  if (chosen[0].empty() || chosen[1].empty()) {
    part.whole = true;
    left_over.push_back(std::move(part));
    return {};
  }
  const auto separator = static_cast<double>(chosen[kSeparator].size());
  const bool thin = separator * separator <= kThin * part.graph.vertices;
  Index place = part.place;
  for (const std::size_t s : {0, 1}) {
    Buffer<Index> local(part.graph.vertices, -1);
    Part half;
    for (const Index v : chosen[s]) {
      local[v] = static_cast<Index>(half.vertices.size());
      half.vertices.push_back(part.vertices[static_cast<std::size_t>(v)]);
    }
    half.graph = subgraph(part.graph, local, chosen[s].data(), static_cast<Index>(chosen[s].size()));
    half.place = place;
    half.thin = thin;
    half.quick = separation->by_cliques || separation->level_cost > 0;
    half.level_cost = separation->level_cost;
    half.scattered = is_scattered(half.graph);
    place += half.graph.vertices;
    left_over.push_back(std::move(half));
  }
  for (const Index v : chosen[kSeparator]) vertex_at[place++] = part.vertices[static_cast<std::size_t>(v)];
  return {};
}

/// Calls work(k, worker) for k in [0, pieces), by several threads where a pool is given; the first failure in
/// order.
template <class Work>
Status for_all(ThreadPool* pool, std::size_t pieces, const Work& work) {
  std::vector<Status> found(pieces);
  if (pool != nullptr) {
    pool->run(static_cast<Offset>(pieces), [&](Offset k, int worker) {
      found[static_cast<std::size_t>(k)] = work(static_cast<std::size_t>(k), worker);
    });
  } else {
    for (std::size_t k = 0; k < pieces; ++k) found[k] = work(k, 0);
  }
  for (Status& status : found) {
    if (!status.ok()) return std::move(status);
  }
  return {};
}

bool to_be_cut(const Part& part, int level) {
  const bool by_cliques = part.quick && part.level_cost == 0;
  const Index whole_up_to = part.thin && part.scattered ? kScatteredWholeUpTo
                            : part.thin || by_cliques   ? kQuickWholeUpTo
                                                        : kWholeUpTo;
  return !part.whole && part.graph.vertices > whole_up_to && (level < kLevels || part.thin || part.quick);
}

bool try_generator() {
  std::srand(1);
  const int first = std::rand();
  std::srand(1);
  std::thread([] { std::srand(2); }).join();
  return std::rand() == first;
}

}  // namespace

bool generator_is_per_thread() {
  static const bool found = try_generator();
  return found;
}

Result<Buffer<Index>> nested_dissection(const Graph& graph, int threads) {
  if (graph.adjacency.size() > std::numeric_limits<idx_t>::max()) {
    return Status::resource_limit("metis-index-width",
                                  "the graph has " + std::to_string(graph.adjacency.size()) +
                                      " edge ends, more than this METIS build can index",
                                  "", "give the dof map (--dofs) so that nodes, not equations, are ordered");
  }
  std::vector<Part> parts(1);
  parts[0].graph = {graph.vertices, graph.start.clone(), graph.adjacency.clone(), graph.weight.clone()};
  parts[0].vertices.resize(static_cast<std::size_t>(graph.vertices));
  for (Index v = 0; v < graph.vertices; ++v) parts[0].vertices[static_cast<std::size_t>(v)] = v;
  Buffer<Index> vertex_at(graph.vertices);
  std::unique_ptr<ThreadPool> pool;
  if (threads > 1 && to_be_cut(parts[0], 0) && generator_is_per_thread())
    pool = std::make_unique<ThreadPool>(threads);
  for (int level = 0;; ++level) {
    const auto large = [level](const Part& part) { return to_be_cut(part, level); };
    if (std::none_of(parts.begin(), parts.end(), large)) break;
    std::vector<std::vector<Part>> left_over(parts.size());
    Status done = for_all(pool.get(), parts.size(), [&](std::size_t k, int) {
      if (large(parts[k])) return cut(std::move(parts[k]), left_over[k], vertex_at);
      left_over[k].push_back(std::move(parts[k]));
      return Status{};
    });
    if (!done.ok()) return done;
    parts.clear();
    for (auto& some : left_over) std::move(some.begin(), some.end(), std::back_inserter(parts));
  }
  std::stable_sort(parts.begin(), parts.end(),
                   [](const Part& a, const Part& b) { return a.graph.vertices > b.graph.vertices; });
  std::vector<Buffer<Index>> local(pool ? static_cast<std::size_t>(pool->size()) : 1);  // a worker
  Status done = for_all(pool.get(), parts.size(), [&](std::size_t k, int worker) {
    if (!parts[k].thin) return order_whole(parts[k], vertex_at);
    Buffer<Index>& mine = local[static_cast<std::size_t>(worker)];
    if (mine.empty()) mine = Buffer<Index>(graph.vertices, -1);
    return order_thin(graph, parts[k], mine, vertex_at);
  });
  if (!done.ok()) return done;
  return vertex_at;
}

}  // namespace stanchion
