// Ends jobs: their files safe on disk first, then the transition, then the news. Several jobs at a time, so
// that they share the wait for the disk.
#pragma once

#include <condition_variable>
#include <cstdint>
#include <deque>
#include <mutex>
#include <string>
#include <thread>
#include <vector>

#include "base/log_record.hpp"
#include "service/event_feed.hpp"
#include "service/input_store.hpp"
#include "service/job_journal.hpp"

namespace stanchion::service {

struct FinishedRun {
  JobRecord job;          ///< with state, exit code and problem set
  std::string folder;     ///< where its files are
  bool has_begun = true;  ///< false: it fails before it was begun
  double cpu_seconds = 0;
};

struct FinisherFigures {
  std::uint64_t done = 0, failed = 0, cancelled = 0;
  double cpu_seconds = 0;
};

class JobFinisher {
 public:
  JobFinisher(JobJournal& journal, InputStore& inputs, EventFeed& feed, LogSink log);
  ~JobFinisher();
  JobFinisher(const JobFinisher&) = delete;
  JobFinisher& operator=(const JobFinisher&) = delete;

  /// Thread safe. The destructor waits until all is done. While the store cannot be written the ends are kept
  /// and tried again; what then is left at the end of the service runs once more with the next one.
  void finish(FinishedRun run);
  FinisherFigures figures() const;

 private:
  void work();
  void finish_one(FinishedRun& run);
  bool write_end(const FinishedRun& run);

  JobJournal& journal_;
  InputStore& inputs_;
  EventFeed& feed_;
  LogSink log_;
  mutable std::mutex mutex_;
  std::condition_variable changed_;
  std::deque<FinishedRun> runs_;
  FinisherFigures figures_;
  bool stopping_ = false;
  std::vector<std::thread> threads_;
};

}  // namespace stanchion::service
