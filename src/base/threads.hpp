// The one pool of threads: fork-join loops over numbered pieces of work.
#pragma once

#include <atomic>
#include <condition_variable>
#include <functional>
#include <mutex>
#include <thread>
#include <vector>

#include "stanchion/types.hpp"

namespace stanchion {

/// Fixed set of workers. The calling thread is worker 0 and takes part in every loop.
/// Not reentrant: `run` must not be called from inside a piece of work.
class ThreadPool {
 public:
  /// `threads` >= 1; `threads` - 1 are started.
  explicit ThreadPool(int threads);
  ~ThreadPool();
  ThreadPool(const ThreadPool&) = delete;
  ThreadPool& operator=(const ThreadPool&) = delete;

  int size() const { return static_cast<int>(workers_.size()) + 1; }

  /// Calls `work(piece, worker)` once for each piece in [0, pieces), pieces handed out in order to whichever
  /// worker is free; returns when all are done. The first exception thrown by a piece is rethrown here after
  /// the others have finished. Which worker gets a piece is not reproducible: results must not depend on it.
  void run(Offset pieces, const std::function<void(Offset piece, int worker)>& work);

 private:
  void worker_loop(int worker);
  void drain(int worker);

  std::vector<std::thread> workers_;
  std::mutex mutex_;
  std::condition_variable start_, done_;
  std::atomic<unsigned> generation_{0};
  std::atomic<bool> stop_{false};
  std::atomic<Offset> next_{0};
  Offset pieces_ = 0;
  std::atomic<int> busy_{0};
  const std::function<void(Offset, int)>* work_ = nullptr;
  std::exception_ptr failure_;
};

/// Number of processors this process may run on (affinity respected), at least 1.
int available_processors();

}  // namespace stanchion
