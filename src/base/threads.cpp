#include "base/threads.hpp"

#include <sched.h>

#include <chrono>
#include <exception>

namespace stanchion {
namespace {

/// Iterations a worker polls for new work before it sleeps: fork-join loops inside one front follow each
/// other within microseconds, where a sleep and wake-up would cost more than the work.
constexpr int kSpins = 5000;

inline void relax() {
  __builtin_ia32_pause();
}

/// Polls in a row before each one offers the processor to others: whom we wait for may need it.
constexpr int kBusyPolls = 500;

void wait_a_little(int polls) {
  if (polls < kBusyPolls) {
    relax();
  } else {
    sched_yield();
  }
}

/// Polls of an idle worker before it dozes, so that it costs little where others need the processor.
constexpr int kIdlePolls = 5000;
constexpr std::chrono::microseconds kDoze{50};

/// The pool whose piece this thread is inside, and as which worker.
struct Inside {
  const ThreadPool* pool = nullptr;
  int worker = 0;
};
thread_local Inside inside;

}  // namespace

ThreadPool::ThreadPool(int threads)
    : shared_loops_(std::make_unique<SharedLoop[]>(static_cast<std::size_t>(threads))) {
  for (int worker = 1; worker < threads; ++worker) {
    workers_.emplace_back([this, worker] { worker_loop(worker); });
  }
}

ThreadPool::~ThreadPool() {
  {
    std::lock_guard lock(mutex_);
    stop_ = true;
    generation_.fetch_add(1);
  }
  start_.notify_all();
  for (auto& thread : workers_) thread.join();
}

void ThreadPool::drain(int worker) {
  for (;;) {
    const Offset piece = next_.fetch_add(1);
    if (piece >= pieces_) return;
    inside = {this, worker};
    try {
      (*work_)(piece, worker);
    } catch (...) {
      std::lock_guard lock(mutex_);
      if (!failure_) failure_ = std::current_exception();
    }
    inside = {};
    unfinished_.fetch_sub(1, std::memory_order_acq_rel);
  }
}

void ThreadPool::SharedLoop::drain() {
  for (;;) {
    const Offset piece = next.fetch_add(1);
    if (piece >= pieces) return;
    try {
      (*work)(piece);
    } catch (...) {
      std::lock_guard lock(mutex);
      if (!failure) failure = std::current_exception();
    }
  }
}

void ThreadPool::assist(int worker) {
  for (int polls = 0; unfinished_.load(std::memory_order_acquire) > 0; ++polls) {
    for (int other = 0; other < size(); ++other) {
      SharedLoop& loop = shared_loops_[static_cast<std::size_t>(other)];
      if (other == worker || !loop.open.load()) continue;
      // The owner waits for helpers after it closes; one that came too late sees that and leaves the loop
      // alone.
      loop.helpers.fetch_add(1);
      if (loop.open.load()) {
        loop.drain();
        polls = 0;
      }
      loop.helpers.fetch_sub(1);
    }
    if (polls < kIdlePolls) {
      wait_a_little(polls);
    } else {
      std::this_thread::sleep_for(kDoze);
    }
  }
}

void ThreadPool::share(Offset pieces, const std::function<void(Offset)>& work) {
  if (inside.pool != this && !workers_.empty()) {
    return run(pieces, [&](Offset piece, int) { work(piece); });
  }
  if (pieces <= 1 || workers_.empty() || !sharing_) {
    for (Offset piece = 0; piece < pieces; ++piece) work(piece);
    return;
  }
  SharedLoop& loop = shared_loops_[static_cast<std::size_t>(inside.worker)];
  loop.work = &work;
  loop.pieces = pieces;
  loop.next = 0;
  loop.failure = nullptr;
  loop.open = true;
  loop.drain();
  loop.open = false;
  for (int polls = 0; loop.helpers.load() != 0; ++polls) wait_a_little(polls);
  if (loop.failure) std::rethrow_exception(loop.failure);
}

void ThreadPool::worker_loop(int worker) {
  unsigned seen = 0;
  for (;;) {
    for (int spin = 0; spin < kSpins && generation_.load(std::memory_order_acquire) == seen; ++spin)
      wait_a_little(spin);
    if (generation_.load(std::memory_order_acquire) == seen) {
      std::unique_lock lock(mutex_);
      start_.wait(lock, [&] { return generation_.load() != seen; });
    }
    seen = generation_.load(std::memory_order_acquire);
    if (stop_) return;
    drain(worker);
    if (sharing_) assist(worker);
    if (busy_.fetch_sub(1, std::memory_order_acq_rel) == 1) {
      std::lock_guard lock(mutex_);
      done_.notify_one();
    }
  }
}

void ThreadPool::run(Offset pieces, const std::function<void(Offset, int)>& work) {
  start(pieces, work, false);
}

void ThreadPool::run_sharing(Offset pieces, const std::function<void(Offset, int)>& work) {
  start(pieces, work, true);
}

void ThreadPool::start(Offset pieces, const std::function<void(Offset, int)>& work, bool sharing) {
  if (pieces <= 0) return;
  if (workers_.empty() || (pieces == 1 && !sharing)) {
    sharing_ = false;
    work_ = &work;
    pieces_ = pieces;
    unfinished_ = pieces;
    next_ = 0;
    failure_ = nullptr;
    drain(0);
    if (failure_) std::rethrow_exception(failure_);
    return;
  }
  {
    std::lock_guard lock(mutex_);
    sharing_ = sharing;
    work_ = &work;
    pieces_ = pieces;
    unfinished_ = pieces;
    next_ = 0;
    failure_ = nullptr;
    busy_ = static_cast<int>(workers_.size());
    generation_.fetch_add(1, std::memory_order_release);
  }
  start_.notify_all();
  drain(0);
  if (sharing_) assist(0);
  for (int spin = 0; spin < kSpins && busy_.load(std::memory_order_acquire) != 0; ++spin) wait_a_little(spin);
  if (busy_.load(std::memory_order_acquire) != 0) {
    std::unique_lock lock(mutex_);
    done_.wait(lock, [&] { return busy_.load() == 0; });
  }
  if (failure_) std::rethrow_exception(failure_);
}

int available_processors() {
  cpu_set_t set;
  CPU_ZERO(&set);
  if (sched_getaffinity(0, sizeof(set), &set) == 0) {
    const int count = CPU_COUNT(&set);
    if (count > 0) return count;
  }
  const unsigned hardware = std::thread::hardware_concurrency();
  return hardware > 0 ? static_cast<int>(hardware) : 1;
}

}  // namespace stanchion
