#include "symbolic/schedule.hpp"

#include <algorithm>
#include <functional>
#include <limits>
#include <utility>

#include "dense/trailing_update.hpp"

namespace stanchion {
namespace {

/// Subtrees per worker aimed at, so that the last ones to finish leave little idle time.
constexpr double kSubtreesPerWorker = 8;

struct TreeShape {
  std::vector<double> subtree_flops;
  std::vector<Index> first;  ///< first front of the subtree rooted here
  std::vector<std::vector<Index>> children;
  std::vector<Index> roots;
};

TreeShape shape_of(const AssemblyTree& tree) {
  const auto count = static_cast<std::size_t>(tree.fronts);
  TreeShape shape{
      std::vector<double>(count), std::vector<Index>(count), std::vector<std::vector<Index>>(count), {}};
  for (Index f = 0; f < tree.fronts; ++f) {
    const auto i = static_cast<std::size_t>(f);
    const auto& mine = shape.children[i];
    shape.first[i] = mine.empty() ? f : shape.first[static_cast<std::size_t>(mine.front())];
    shape.subtree_flops[i] += front_flops(tree.order(f), tree.pivots(f));
    if (tree.parent[f] < 0) {
      shape.roots.push_back(f);
    } else {
      shape.children[static_cast<std::size_t>(tree.parent[f])].push_back(f);
      shape.subtree_flops[static_cast<std::size_t>(tree.parent[f])] += shape.subtree_flops[i];
    }
  }
  return shape;
}

/// Blocks of an arena start on cache lines.
Offset rounded_up(Offset doubles) {
  return (doubles + 7) / 8 * 8;
}
Offset front_doubles(const AssemblyTree& tree, Index f) {
  return rounded_up(front_layout(tree.order(f)).size());
}
Offset result_doubles(const AssemblyTree& tree, Index f) {
  return rounded_up(contribution_numbers(tree.below(f)));
}

/// High-water mark of a last-in-first-out stack over the fronts named, in order.
/// `waiting`: zeros, one a front; zeros again afterwards.
Offset stack_peak(const AssemblyTree& tree, const std::vector<Index>& fronts,
                  const std::vector<char>& on_this_stack, std::vector<Offset>& waiting) {
  Offset top = 0, peak = 0;
  for (const Index f : fronts) {
    peak = std::max(peak, top + front_doubles(tree, f));
    top += result_doubles(tree, f) - std::exchange(waiting[static_cast<std::size_t>(f)], 0);
    const Index up = tree.parent[f];
    if (up >= 0 && on_this_stack[static_cast<std::size_t>(up)]) {
      waiting[static_cast<std::size_t>(up)] += result_doubles(tree, f);
    }
  }
  return peak;
}

/// What waits for each shared front: results of subtrees, and of shared fronts on the shared stack.
struct Waiting {
  std::vector<Offset> from_subtrees, on_stack;
  std::vector<char> shared;
};

Waiting waiting_for_fronts(const AssemblyTree& tree, const Schedule& schedule) {
  const auto fronts = static_cast<std::size_t>(tree.fronts);
  Waiting waiting{std::vector<Offset>(fronts, 0), std::vector<Offset>(fronts, 0),
                  std::vector<char>(fronts, 0)};
  for (const Index f : schedule.shared_fronts) waiting.shared[static_cast<std::size_t>(f)] = 1;
  for (const Subtree& subtree : schedule.subtrees) {
    const Index up = tree.parent[subtree.end - 1];
    if (up >= 0) waiting.from_subtrees[static_cast<std::size_t>(up)] += subtree.result_doubles;
  }
  for (const Index f : schedule.shared_fronts) {
    const Index up = tree.parent[f];
    if (up >= 0 && waiting.shared[static_cast<std::size_t>(up)]) {
      waiting.on_stack[static_cast<std::size_t>(up)] += result_doubles(tree, f);
    }
  }
  return waiting;
}

/// The largest stacks of subtrees, one for each of `workers`, with their scratch.
Offset worker_doubles(const Schedule& schedule, int workers) {
  std::vector<Offset> arenas;
  for (const Subtree& subtree : schedule.subtrees) arenas.push_back(subtree.arena_doubles);
  const auto busy = std::min<std::size_t>(static_cast<std::size_t>(workers), arenas.size());
  std::partial_sort(arenas.begin(), arenas.begin() + static_cast<std::ptrdiff_t>(busy), arenas.end(),
                    std::greater<>());
  Offset total = 0;
  for (std::size_t k = 0; k < busy; ++k) total += arenas[k] + schedule.panel_doubles;
  return total;
}

/// Bound on everything alive at once: the workers' stacks while a wave's subtrees run, waiting results, and
/// the shared stack, which keeps its highest mark of a wave until the wave ends. `keep`: all stacks stay as
/// they are to the end.
Offset peak_of_waves(const AssemblyTree& tree, const Schedule& schedule, const std::vector<Wave>& waves,
                     int workers, bool keep) {
  const Waiting waiting = waiting_for_fronts(tree, schedule);
  const Offset stacks = worker_doubles(schedule, workers), kept = keep ? stacks : 0;
  Offset results = 0, top = 0, touched = 0, peak = 0;
  for (const Wave& wave : waves) {
    for (std::size_t k = wave.first_subtree; k < wave.end_subtree; ++k) {
      results += schedule.subtrees[k].result_doubles;
    }
    if (!keep) touched = top;
    peak = std::max(peak, touched + results + stacks);
    for (std::size_t k = wave.first_shared; k < wave.end_shared; ++k) {
      const Index f = schedule.shared_fronts[k];
      touched = std::max(touched, top + front_doubles(tree, f));
      peak = std::max(peak, touched + results + schedule.panel_doubles + kept);
      results -= waiting.from_subtrees[static_cast<std::size_t>(f)];
      top += result_doubles(tree, f) - waiting.on_stack[static_cast<std::size_t>(f)];
    }
  }
  return peak;
}

/// Runs of subtrees and the shared fronts between them, in processing order.
std::vector<Wave> processing_waves(const Schedule& schedule) {
  std::vector<Wave> waves;
  std::size_t subtree = 0, shared = 0;
  while (subtree < schedule.subtrees.size()) {
    Wave wave{subtree, subtree, shared, shared};
    const Index next = shared < schedule.shared_fronts.size() ? schedule.shared_fronts[shared]
                                                              : schedule.subtrees.back().end;
    while (subtree < schedule.subtrees.size() && schedule.subtrees[subtree].first < next) ++subtree;
    const Index stop = subtree < schedule.subtrees.size() ? schedule.subtrees[subtree].first
                                                          : std::numeric_limits<Index>::max();
    while (shared < schedule.shared_fronts.size() && schedule.shared_fronts[shared] < stop) ++shared;
    wave.end_subtree = subtree;
    wave.end_shared = shared;
    waves.push_back(wave);
  }
  return waves;
}

/// Memory below which time matters more, in doubles; the share of it that waves must save; and how much more
/// of it stacks may take that are kept, since pages given back are cleared again when they return.
constexpr Offset kSmallPeak = Offset{100} << 17;
constexpr double kWorthSaving = 0.85, kWorthKeeping = 1.25;

void choose_waves(const AssemblyTree& tree, Schedule& schedule) {
  schedule.waves = {{0, schedule.subtrees.size(), 0, schedule.shared_fronts.size()}};
  schedule.peak_doubles = peak_of_waves(tree, schedule, schedule.waves, schedule.workers, false);
  if (!schedule.shared_fronts.empty() && schedule.peak_doubles >= kSmallPeak) {
    std::vector<Wave> many = processing_waves(schedule);
    const Offset peak = peak_of_waves(tree, schedule, many, schedule.workers, false);
    if (static_cast<double>(peak) <= kWorthSaving * static_cast<double>(schedule.peak_doubles)) {
      schedule.waves = std::move(many);
      schedule.peak_doubles = peak;
    }
  }
  const Offset kept = peak_of_waves(tree, schedule, schedule.waves, schedule.workers, true);
  schedule.keep_stacks = kept < kSmallPeak || static_cast<double>(kept) <=
                                                  kWorthKeeping * static_cast<double>(schedule.peak_doubles);
  if (schedule.keep_stacks) schedule.peak_doubles = kept;
}

}  // namespace

Offset peak_doubles_of(const AssemblyTree& tree, const Schedule& schedule, int workers) {
  return peak_of_waves(tree, schedule, schedule.waves, std::min(workers, schedule.workers),
                       schedule.keep_stacks);
}

double front_flops(Index order, Index pivots) {
  const double m = order, rest = order - pivots;
  return (m * (m + 1) * (2 * m + 1) - rest * (rest + 1) * (2 * rest + 1)) / 6;
}

Schedule make_schedule(const AssemblyTree& tree, int workers) {
  const TreeShape shape = shape_of(tree);
  Schedule schedule;
  schedule.workers = workers;
  double total = 0;
  for (const Index root : shape.roots) total += shape.subtree_flops[static_cast<std::size_t>(root)];
  const double target = workers > 1 ? total / (kSubtreesPerWorker * workers) : total;
  std::vector<char> shared(static_cast<std::size_t>(tree.fronts), 0);
  std::vector<Index> open = shape.roots;
  while (!open.empty()) {
    const Index f = open.back();
    open.pop_back();
    const auto i = static_cast<std::size_t>(f);
    const bool split = workers > 1 && shape.subtree_flops[i] > target &&
                       front_flops(tree.order(f), tree.pivots(f)) > kShareFlops;
    if (split) {
      shared[i] = 1;
      open.insert(open.end(), shape.children[i].begin(), shape.children[i].end());
    } else {
      schedule.subtrees.push_back({shape.first[i], f + 1, shape.subtree_flops[i], 0, 0});
    }
  }
  std::sort(schedule.subtrees.begin(), schedule.subtrees.end(),
            [](const Subtree& a, const Subtree& b) { return a.first < b.first; });

  std::vector<Index> fronts;
  std::vector<char> inside(static_cast<std::size_t>(tree.fronts), 0);
  std::vector<Offset> waiting(static_cast<std::size_t>(tree.fronts), 0);
  for (Subtree& subtree : schedule.subtrees) {
    fronts.clear();
    for (Index f = subtree.first; f < subtree.end; ++f) {
      fronts.push_back(f);
      inside[static_cast<std::size_t>(f)] = 1;
    }
    subtree.arena_doubles = stack_peak(tree, fronts, inside, waiting);
    subtree.result_doubles = result_doubles(tree, subtree.end - 1);
    schedule.worker_arena_doubles = std::max(schedule.worker_arena_doubles, subtree.arena_doubles);
    for (const Index f : fronts) inside[static_cast<std::size_t>(f)] = 0;
  }
  Index largest = 0, widest = 0;
  for (Index f = 0; f < tree.fronts; ++f) {
    if (shared[static_cast<std::size_t>(f)]) schedule.shared_fronts.push_back(f);
    largest = std::max(largest, tree.order(f));
    widest = std::max(widest, tree.pivots(f));
  }
  schedule.shared_arena_doubles = stack_peak(tree, schedule.shared_fronts, shared, waiting);
  // A worker's scratch: the panels of the widest front, and its map of all rows.
  schedule.panel_doubles =
      eliminated_doubles(largest, widest) + eliminated_doubles(kFrontBlock, kTileWidth) + tree.rows / 2 + 1;
  choose_waves(tree, schedule);
  return schedule;
}

}  // namespace stanchion
