// The one writer of the store: changes asked for at the same time share one transaction and one wait for the
// disk.
#pragma once

#include <condition_variable>
#include <functional>
#include <future>
#include <memory>
#include <mutex>
#include <string>
#include <thread>
#include <vector>

#include "service/database.hpp"
#include "service/job_table.hpp"
#include "stanchion/status.hpp"

namespace stanchion::service {

/// Thread safe.
class JobJournal {
 public:
  /// Opens or makes the database file, brings it up to date, and recovers after a crash. Errors: resource
  /// limit "store" with what the database says.
  static Result<std::unique_ptr<JobJournal>> open(const std::string& path);
  ~JobJournal();
  JobJournal(const JobJournal&) = delete;
  JobJournal& operator=(const JobJournal&) = delete;

  /// Runs `change` in a transaction, with others that come at the same time, and waits until the disk has it.
  /// What it throws undoes the transaction and comes back as failure. `change` may be run twice: when another
  /// one of the transaction fails, each gets its own.
  Status write(const std::function<void(JobTable&)>& change);

  /// Reads the last written state, side by side with the writer.
  Status read(const std::function<void(JobTable&)>& look) const;

  struct Figures {
    std::uint64_t transactions = 0, changes = 0;
    bool healthy = true;  ///< the last transaction went through
  };
  Figures figures() const;

 private:
  struct Change {
    const std::function<void(JobTable&)>* change;
    std::promise<Status> done;
  };

  explicit JobJournal(const std::string& path);
  void write_all();
  void settle(std::vector<Change>& changes);
  Status commit(Change* first, std::size_t count, bool& begun);

  Database writer_;
  std::unique_ptr<JobTable> writer_table_;
  mutable std::mutex reader_mutex_;
  mutable std::unique_ptr<Database> reader_;
  mutable std::unique_ptr<JobTable> reader_table_;

  mutable std::mutex mutex_;
  std::condition_variable changed_;
  std::vector<Change> waiting_;
  Figures figures_;
  bool stopping_ = false;
  std::thread thread_;
};

/// Milliseconds since 1970.
std::int64_t now_ms();

}  // namespace stanchion::service
