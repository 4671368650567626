#include <algorithm>
#include <memory>
#include <mutex>
#include <new>
#include <numeric>

#include "base/clock.hpp"
#include "base/fault_words.hpp"
#include "dense/blas.hpp"
#include "numeric/front_worker.hpp"
#include "numeric/stack_room.hpp"

namespace stanchion {
namespace {

/// What one factorization works in.
template <class Scalar>
struct WorkingMemory {
  std::vector<std::unique_ptr<FrontWorker<Scalar>>> workers;
  std::unique_ptr<FrontWorker<Scalar>> shared;
  std::vector<Contribution<Scalar>> waiting;
};

/// Sets that are free.
template <class Scalar>
class MemoryStock {
 public:
  std::unique_ptr<WorkingMemory<Scalar>> take() {
    std::lock_guard lock(mutex_);
    if (free_.empty()) return std::make_unique<WorkingMemory<Scalar>>();
    auto taken = std::move(free_.back());
    free_.pop_back();
    return taken;
  }
  void give(std::unique_ptr<WorkingMemory<Scalar>> memory) {
    std::lock_guard lock(mutex_);
    free_.push_back(std::move(memory));
  }

 private:
  std::mutex mutex_;
  std::vector<std::unique_ptr<WorkingMemory<Scalar>>> free_;
};

}  // namespace

struct FactorWorkspace::Parts {
  MemoryStock<double> of_double;
  MemoryStock<float> of_single;
  template <class Scalar>
  MemoryStock<Scalar>& stock() {
    if constexpr (std::is_same_v<Scalar, double>) {
      return of_double;
    } else {
      return of_single;
    }
  }
};

FactorWorkspace::FactorWorkspace() : parts_(std::make_unique<Parts>()) {}
FactorWorkspace::~FactorWorkspace() = default;

namespace {

/// Stack that a worker keeps for the next factorization.
constexpr Offset kKeptDoubles = (Offset{32} << 20) / Offset{sizeof(double)};

/// Runs subtrees on single workers, then the shared fronts with everyone, and adds up what was counted.
template <class Scalar>
class Factorizer {
 public:
  Factorizer(const Analysis& analysis, const ShiftedMatrix& matrix, const FactorOptions& options,
             ThreadPool& pool, Offset stack_times)
      : run_{analysis, matrix, options, {}, nullptr, MemoryLedger(options.memory_cap_bytes)},
        pool_(pool),
        stack_times_(stack_times),
        memory_(options.workspace ? stock().take() : std::make_unique<WorkingMemory<Scalar>>()) {
    run_.waiting = std::move(memory_->waiting);
    run_.waiting.resize(static_cast<std::size_t>(analysis.tree.fronts));
    memory_->workers.resize(static_cast<std::size_t>(pool.size()));
  }

  ~Factorizer() {
    for (auto& worker : memory_->workers) drop(worker);
    drop(memory_->shared);
    if (!run_.options.workspace) return;
    // Blocks that nobody took, where the run ended early, go before the memory they may lie in.
    if (run_.abandon || !status_.ok()) run_.waiting.clear();
    memory_->waiting = std::move(run_.waiting);
    stock().give(std::move(memory_));
  }

  bool stack_full() const { return run_.stack_full; }

  Result<Factorization> run() {
    Stopwatch watch;
    Factorization result;
    run_.probe = draw_fault_probe(run_.matrix, run_.options.seed, &pool_);
    run_.memory.book(run_.probe.bytes());
    if (run_.options.keep_factor) {
      result.factor.emplace();
      result.factor->rows = run_.analysis.tree.rows;
      result.factor->fronts.resize(static_cast<std::size_t>(run_.analysis.tree.fronts));
      run_.factor = &*result.factor;
    }
    result.component_signs.resize(static_cast<std::size_t>(run_.analysis.tree.components));
    run_waves(result);
    for (auto& worker : memory_->workers) collect(result, worker);
    collect(result, memory_->shared);
    if (!status_.ok()) return status_;
    result.error_bound *= run_.slack();
    result.unit_roundoff = Rounding<Scalar>::kUnit;
    result.peak_bytes = run_.memory.peak();
    result.seconds = watch.seconds();
    return result;
  }

 private:
  void fail(Status status) {
    std::lock_guard lock(mutex_);
    if (status_.ok()) status_ = std::move(status);
    run_.abandon = true;
  }

  /// Processes one front and reports progress; false when the run is to end.
  bool step(FrontWorker<Scalar>& worker, Index front, ThreadPool* team) {
    if (run_.abandon) return false;
    if (run_.options.cancel != nullptr && run_.options.cancel->cancelled()) {
      fail(Status::interrupted());
      return false;
    }
    try {
      if (Status status = worker.process(front, team); !status.ok()) fail(std::move(status));
    } catch (const std::bad_alloc&) {
      fail(Status::resource_limit("out-of-memory", "the system has no more memory for the numeric phase", "",
                                  "free memory, use fewer threads, or a machine with more memory"));
    }
    report_progress(front);
    return !run_.abandon;
  }

  void report_progress(Index front) {
    const AssemblyTree& tree = run_.analysis.tree;
    const double flops = front_flops(tree.order(front), tree.pivots(front));
    double done = run_.flops_done.load();
    while (!run_.flops_done.compare_exchange_weak(done, done + flops)) {
    }
    if (!run_.options.progress) return;
    std::unique_lock lock(progress_mutex_, std::try_to_lock);
    if (lock.owns_lock()) {
      run_.options.progress("factor",
                            std::min(1.0, done / std::max(1.0, run_.analysis.forecast.front_flops)));
    }
  }

  void run_waves(Factorization& result) {
    const Schedule& schedule = run_.analysis.schedule;
    for (const Wave& wave : schedule.waves) {
      run_subtrees(wave);
      if (!status_.ok() || run_.abandon) return;
      if (!schedule.keep_stacks) {
        for (auto& worker : memory_->workers) {  // their stacks make room for the shared one
          collect(result, worker);
          worker.reset();
        }
      }
      for (std::size_t k = wave.first_shared; k < wave.end_shared; ++k) {
        if (!start(memory_->shared, schedule.shared_arena_doubles)) return;
        if (!step(*memory_->shared, schedule.shared_fronts[k], &pool_)) return;
      }
      if (memory_->shared && !schedule.keep_stacks && &wave != &schedule.waves.back()) {
        if (Status status = memory_->shared->trim(); !status.ok()) return fail(std::move(status));
      }
    }
  }

  /// The subtrees of one wave, the largest first, each on whichever worker is free; who finds none left takes
  /// part in the larger fronts of the others.
  void run_subtrees(const Wave& wave) {
    const Schedule& schedule = run_.analysis.schedule;
    std::vector<std::size_t> by_size(wave.end_subtree - wave.first_subtree);
    std::iota(by_size.begin(), by_size.end(), wave.first_subtree);
    std::stable_sort(by_size.begin(), by_size.end(), [&](std::size_t a, std::size_t b) {
      return schedule.subtrees[a].flops > schedule.subtrees[b].flops;
    });
    pool_.run_sharing(static_cast<Offset>(by_size.size()), [&](Offset piece, int worker) {
      if (run_.abandon) return;
      auto& mine = memory_->workers[static_cast<std::size_t>(worker)];
      const Subtree& subtree = schedule.subtrees[by_size[static_cast<std::size_t>(piece)]];
      if (!start(mine, schedule.worker_arena_doubles)) return;
      for (Index f = subtree.first; f < subtree.end; ++f) {
        const bool large =
            front_flops(run_.analysis.tree.order(f), run_.analysis.tree.pivots(f)) > kShareFlops;
        if (!step(*mine, f, large ? &pool_ : nullptr)) return;
      }
      try {
        if (Status status = mine->detach(subtree.end - 1); !status.ok()) fail(std::move(status));
      } catch (const std::bad_alloc&) {
        fail(
            Status::resource_limit("out-of-memory", "no memory for a contribution block", "", "free memory"));
      }
    });
  }

  /// Makes the worker ready for this run, if it is not yet.
  bool start(std::unique_ptr<FrontWorker<Scalar>>& worker, Offset forecast_doubles) {
    if (worker && worker->serves(run_)) return true;
    const Index rows = run_.analysis.tree.rows;
    const Offset arena_doubles = stack_doubles(forecast_doubles, rows, stack_times_);
    try {
      if (!worker || !worker->fits(rows, arena_doubles)) {
        worker.reset();
        worker = std::make_unique<FrontWorker<Scalar>>(rows, arena_doubles);
      }
      worker->begin(run_);
      return true;
    } catch (const std::bad_alloc&) {
      fail(Status::resource_limit("out-of-memory", "no address space for the stack of fronts", "",
                                  "free memory or lift the limit on virtual memory"));
      return false;
    }
  }

  MemoryStock<Scalar>& stock() { return run_.options.workspace->parts().template stock<Scalar>(); }

  /// Adds a worker's counts to the result and takes over the panels it kept; it serves no longer.
  void collect(Factorization& result, std::unique_ptr<FrontWorker<Scalar>>& worker) {
    if (!worker || !worker->serves(run_)) return;
    result.collect(*worker);
    if (result.factor) result.factor->memory.push_back(std::move(worker->kept_memory));
    drop(worker);
  }

  /// A worker that serves no longer stays for the next run where that is wanted.
  void drop(std::unique_ptr<FrontWorker<Scalar>>& worker) {
    if (!worker) return;
    if (worker->serves(run_)) worker->finish(run_.options.keep_factor ? 0 : kKeptDoubles);
    if (!run_.options.workspace) worker.reset();
  }

  FactorRun<Scalar> run_;
  ThreadPool& pool_;
  Offset stack_times_;  ///< stacks hold so many times what is forecast
  std::unique_ptr<WorkingMemory<Scalar>> memory_;
  std::mutex mutex_, progress_mutex_;
  Status status_;
};

}  // namespace

Status check_fault(const Analysis& analysis, const Factorization& factorization) {
  if (!factorization.fault) return {};
  const Index equation = analysis.tree.equation_at[factorization.fault_row];
  return {StatusKind::kInternal, "machine-fault",
          std::string("the factors do not reproduce the matrix within their proved error bound: ") +
              kMachineOrProgram + "; no answer is given",
          "equation " + std::to_string(Offset{equation} + 1),
          "run `stanchion selftest`; then try again on another machine"};
}

namespace {

template <class Scalar>
Result<Factorization> factorize_in(const Analysis& analysis, const ShiftedMatrix& matrix,
                                   const FactorOptions& options, ThreadPool& pool) {
  return run_with_room([&](Offset stack_times) {
    return std::make_unique<Factorizer<Scalar>>(analysis, matrix, options, pool, stack_times);
  });
}

}  // namespace

Result<Factorization> factorize(const Analysis& analysis, const ShiftedMatrix& matrix,
                                const FactorOptions& options, ThreadPool& pool) {
  try {
    use_single_threaded_blas();
    if (!options.single) return factorize_in<double>(analysis, matrix, options, pool);
    if (analysis.tree.rows > kMostSingleRows) return Status::internal("too many rows for single precision");
    return factorize_in<float>(analysis, matrix, options, pool);
  } catch (const std::bad_alloc&) {
    return Status::resource_limit("out-of-memory", "the system has no more memory for the numeric phase", "",
                                  "free memory or use a machine with more memory");
  }
}

}  // namespace stanchion
