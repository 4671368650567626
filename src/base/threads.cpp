#include "base/threads.hpp"

#include <sched.h>

#include <exception>

namespace stanchion {
namespace {

/// Iterations a worker polls for new work before it sleeps: fork-join loops inside one front follow each
/// other within microseconds, where a sleep and wake-up would cost more than the work.
constexpr int kSpins = 20000;

inline void relax() { __builtin_ia32_pause(); }

}  // namespace

ThreadPool::ThreadPool(int threads) {
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
    try {
      (*work_)(piece, worker);
    } catch (...) {
      std::lock_guard lock(mutex_);
      if (!failure_) failure_ = std::current_exception();
    }
  }
}

void ThreadPool::worker_loop(int worker) {
  unsigned seen = 0;
  for (;;) {
    for (int spin = 0; spin < kSpins && generation_.load(std::memory_order_acquire) == seen; ++spin) relax();
    if (generation_.load(std::memory_order_acquire) == seen) {
      std::unique_lock lock(mutex_);
      start_.wait(lock, [&] { return generation_.load() != seen; });
    }
    seen = generation_.load(std::memory_order_acquire);
    if (stop_) return;
    drain(worker);
    if (busy_.fetch_sub(1, std::memory_order_acq_rel) == 1) {
      std::lock_guard lock(mutex_);
      done_.notify_one();
    }
  }
}

void ThreadPool::run(Offset pieces, const std::function<void(Offset, int)>& work) {
  if (pieces <= 0) return;
  if (workers_.empty() || pieces == 1) {
    work_ = &work;
    pieces_ = pieces;
    next_ = 0;
    failure_ = nullptr;
    drain(0);
    if (failure_) std::rethrow_exception(failure_);
    return;
  }
  {
    std::lock_guard lock(mutex_);
    work_ = &work;
    pieces_ = pieces;
    next_ = 0;
    failure_ = nullptr;
    busy_ = static_cast<int>(workers_.size());
    generation_.fetch_add(1, std::memory_order_release);
  }
  start_.notify_all();
  drain(0);
  for (int spin = 0; spin < kSpins && busy_.load(std::memory_order_acquire) != 0; ++spin) relax();
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
