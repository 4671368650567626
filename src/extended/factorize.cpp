#include "extended/factorize.hpp"

#include <algorithm>
#include <memory>
#include <mutex>
#include <new>
#include <numeric>

#include "base/clock.hpp"
#include "extended/front_worker.hpp"
#include "numeric/stack_room.hpp"

namespace stanchion {
namespace {

Status no_memory(const char* what) {
  return Status::resource_limit("out-of-memory", std::string("the system has no more memory for ") + what, "",
                                "free memory, use fewer threads, or a machine with more memory");
}

/// Runs subtrees on single workers, then the shared fronts with everyone, and adds up what was counted.
template <class Scalar>
class ScalarFactorizer {
 public:
  ScalarFactorizer(const Analysis& analysis, const ShiftedMatrix& matrix, const FactorOptions& options,
                   ThreadPool& pool, Offset stack_times)
      : run_{analysis, matrix, options, {}, MemoryLedger(options.memory_cap_bytes)},
        pool_(pool),
        stack_times_(stack_times) {
    run_.waiting.resize(static_cast<std::size_t>(analysis.tree.fronts));
  }

  bool stack_full() const { return run_.stack_full; }

  Result<Factorization> run() {
    const Stopwatch watch;
    Factorization result;
    run_.probe = Worker::draw_probe(run_.matrix, run_.options.seed);
    run_.memory.book(run_.probe.bytes());
    result.component_signs.resize(static_cast<std::size_t>(run_.analysis.tree.components));
    run_subtrees();
    collect(result);
    if (status_.ok() && !run_.abandon) {
      run_shared_fronts();
      collect(result);
    }
    if (!status_.ok()) return status_;
    // Sums of non-negative terms of any practical length, and heads standing for numbers, stay within 0.1 %.
    result.error_bound *= 1.001;
    result.peak_bytes = run_.memory.peak();
    result.seconds = watch.seconds();
    return result;
  }

 private:
  using Worker = ScalarWorker<Scalar>;
  static constexpr Offset kPlanes = ScalarTraits<Scalar>::planes;

  void fail(Status status) {
    const std::lock_guard lock(mutex_);
    if (status_.ok()) status_ = std::move(status);
    run_.abandon = true;
  }

  /// Runs `work` and turns a failure of any kind into the status of the run; false when the run is to end.
  template <class Work>
  bool guarded(const char* what, const Work& work) {
    try {
      if (Status status = work(); !status.ok()) fail(std::move(status));
    } catch (const std::bad_alloc&) {
      fail(no_memory(what));
    }
    return !run_.abandon;
  }

  bool step(Worker& worker, Index front, ThreadPool* team) {
    if (run_.abandon) return false;
    if (run_.options.cancel != nullptr && run_.options.cancel->cancelled()) {
      fail(Status::interrupted());
      return false;
    }
    const bool on = guarded("the numeric phase", [&] { return worker.process(front, team); });
    report_progress(front);
    return on;
  }

  void report_progress(Index front) {
    if (!run_.options.progress) return;
    const AssemblyTree& tree = run_.analysis.tree;
    const std::lock_guard lock(progress_mutex_);
    flops_done_ += front_flops(tree.order(front), tree.pivots(front));
    run_.options.progress("factor",
                          std::min(1.0, flops_done_ / std::max(1.0, run_.analysis.forecast.front_flops)));
  }

  bool start(std::unique_ptr<Worker>& worker, Offset forecast_doubles) {
    return guarded("the stack of fronts", [&] {
      const Offset doubles = stack_doubles(forecast_doubles, run_.analysis.tree.rows, stack_times_);
      worker = std::make_unique<Worker>(run_, doubles * kPlanes);
      return Status{};
    });
  }

  void run_subtrees() {
    const Schedule& schedule = run_.analysis.schedule;
    const auto count = schedule.subtrees.size();
    std::vector<std::size_t> by_size(count);
    std::iota(by_size.begin(), by_size.end(), std::size_t{0});
    std::stable_sort(by_size.begin(), by_size.end(), [&](std::size_t a, std::size_t b) {
      return schedule.subtrees[a].flops > schedule.subtrees[b].flops;
    });
    workers_.resize(static_cast<std::size_t>(pool_.size()));
    pool_.run(static_cast<Offset>(count), [&](Offset piece, int worker) {
      if (run_.abandon) return;
      auto& mine = workers_[static_cast<std::size_t>(worker)];
      const Subtree& subtree = schedule.subtrees[by_size[static_cast<std::size_t>(piece)]];
      if (!mine && !start(mine, schedule.worker_arena_doubles)) return;
      for (Index f = subtree.first; f < subtree.end; ++f) {
        if (!step(*mine, f, nullptr)) return;
      }
      guarded("a contribution block", [&] { return mine->detach(subtree.end - 1); });
    });
  }

  void run_shared_fronts() {
    const Schedule& schedule = run_.analysis.schedule;
    if (schedule.shared_fronts.empty()) return;
    workers_.resize(1);
    if (!start(workers_[0], schedule.shared_arena_doubles)) return;
    for (const Index f : schedule.shared_fronts) {
      if (!step(*workers_[0], f, &pool_)) return;
    }
  }

  /// Adds the workers' counts to the result and lets them go.
  void collect(Factorization& result) {
    for (const auto& worker : workers_) {
      if (worker) result.collect(*worker);
    }
    workers_.clear();
  }

  ScalarRun run_;
  ThreadPool& pool_;
  Offset stack_times_;  ///< stacks hold so many times what is forecast
  std::vector<std::unique_ptr<Worker>> workers_;
  std::mutex mutex_, progress_mutex_;
  double flops_done_ = 0;
  Status status_;
};

template <class Scalar>
Result<Factorization> factorize_in(const Analysis& analysis, const ShiftedMatrix& matrix,
                                   const FactorOptions& options, ThreadPool& pool) {
  try {
    return run_with_room([&](Offset stack_times) {
      return std::make_unique<ScalarFactorizer<Scalar>>(analysis, matrix, options, pool, stack_times);
    });
  } catch (const std::bad_alloc&) {
    return no_memory("the numeric phase");
  }
}

}  // namespace

Result<Factorization> factorize_extended(const Analysis& analysis, const ShiftedMatrix& matrix,
                                         const FactorOptions& options, ThreadPool& pool) {
  return factorize_in<DoubleDouble>(analysis, matrix, options, pool);
}

Result<Factorization> factorize_plainly(const Analysis& analysis, const ShiftedMatrix& matrix,
                                        const FactorOptions& options, ThreadPool& pool) {
  return factorize_in<double>(analysis, matrix, options, pool);
}

}  // namespace stanchion
