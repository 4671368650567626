// The one pool of threads: fork-join loops over numbered pieces of work, and loops inside pieces that idle
// workers join.
#pragma once

#include <atomic>
#include <condition_variable>
#include <functional>
#include <memory>
#include <mutex>
#include <thread>
#include <vector>

#include "stanchion/types.hpp"

namespace stanchion {

/// Fixed set of workers. The calling thread is worker 0 and takes part in every loop.
/// Not reentrant: inside a piece of work only `share` may be called, and not inside a piece of that.
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

  /// The same, but workers that find no piece left take part in what the others share, until all are done.
  /// Meanwhile they poll, then doze: for pieces that run long.
  void run_sharing(Offset pieces, const std::function<void(Offset piece, int worker)>& work);

  /// Calls `work(piece)` for each piece in [0, pieces) and returns when all are done, exceptions as in `run`.
  /// Inside a piece of run_sharing the workers that are idle there take part; inside one of run nobody does;
  /// outside, everyone.
  void share(Offset pieces, const std::function<void(Offset piece)>& work);

 private:
  /// What one worker shares while it is inside a piece of its own.
  struct SharedLoop {
    std::atomic<bool> open{false};
    std::atomic<int> helpers{0};
    std::atomic<Offset> next{0};
    Offset pieces = 0;
    const std::function<void(Offset)>* work = nullptr;
    std::mutex mutex;
    std::exception_ptr failure;

    void drain();
  };

  void start(Offset pieces, const std::function<void(Offset, int)>& work, bool sharing);
  void worker_loop(int worker);
  void drain(int worker);
  void assist(int worker);

  std::vector<std::thread> workers_;
  std::mutex mutex_;
  std::condition_variable start_, done_;
  std::atomic<unsigned> generation_{0};
  std::atomic<bool> stop_{false};
  std::atomic<Offset> next_{0};
  Offset pieces_ = 0;
  std::atomic<int> busy_{0};
  const std::function<void(Offset, int)>* work_ = nullptr;
  bool sharing_ = false;
  std::atomic<Offset> unfinished_{0};           ///< pieces of a sharing loop that have not ended
  std::unique_ptr<SharedLoop[]> shared_loops_;  ///< one a worker
  std::exception_ptr failure_;
};

/// Number of processors this process may run on (affinity respected), at least 1.
int available_processors();

}  // namespace stanchion
