#include "service/job_journal.hpp"

#include <chrono>

namespace stanchion::service {
namespace {

Status failure_of(const std::exception& error) {
  const auto* database = dynamic_cast<const DatabaseError*>(&error);
  if (database == nullptr) return Status::internal(error.what());
  return Status::resource_limit(database->no_space() ? "disk-full" : "store", error.what(), "",
                                "look after the disk that holds the store, and its permissions");
}

}  // namespace

std::int64_t now_ms() {
  return std::chrono::duration_cast<std::chrono::milliseconds>(
             std::chrono::system_clock::now().time_since_epoch())
      .count();
}

Result<std::unique_ptr<JobJournal>> JobJournal::open(const std::string& path) {
  try {
    return std::unique_ptr<JobJournal>(new JobJournal(path));
  } catch (const std::exception& error) {
    return failure_of(error);
  }
}

JobJournal::JobJournal(const std::string& path) : writer_(path) {
  migrate(writer_);
  writer_table_ = std::make_unique<JobTable>(writer_);
  writer_.execute("BEGIN IMMEDIATE");
  writer_table_->recover(now_ms());
  writer_.execute("COMMIT");
  reader_ = std::make_unique<Database>(path);
  reader_table_ = std::make_unique<JobTable>(*reader_);
  thread_ = std::thread([this] { write_all(); });
}

JobJournal::~JobJournal() {
  {
    const std::lock_guard lock(mutex_);
    stopping_ = true;
  }
  changed_.notify_all();
  thread_.join();
}

Status JobJournal::write(const std::function<void(JobTable&)>& change) {
  std::future<Status> done;
  {
    const std::lock_guard lock(mutex_);
    waiting_.push_back({&change, {}});
    done = waiting_.back().done.get_future();
  }
  changed_.notify_all();
  return done.get();
}

Status JobJournal::read(const std::function<void(JobTable&)>& look) const {
  const std::lock_guard lock(reader_mutex_);
  try {
    look(*reader_table_);
    return {};
  } catch (const std::exception& error) {
    return failure_of(error);
  }
}

JobJournal::Figures JobJournal::figures() const {
  const std::lock_guard lock(mutex_);
  return figures_;
}

Status JobJournal::commit(Change* first, std::size_t count, bool& begun) {
  try {
    begun = false;
    writer_.execute("BEGIN IMMEDIATE");
    begun = true;
    for (std::size_t k = 0; k < count; ++k) (*first[k].change)(*writer_table_);
    writer_.execute("COMMIT");
    return {};
  } catch (const std::exception& error) {
    try {
      writer_.execute("ROLLBACK");
    } catch (const DatabaseError&) {
      // The failed statement has ended the transaction itself.
    }
    return failure_of(error);
  }
}

/// All in one transaction; one by one where that fails, so that a bad change fails alone.
void JobJournal::settle(std::vector<Change>& changes) {
  bool begun = false;
  std::vector<Status> results(changes.size(), commit(changes.data(), changes.size(), begun));
  std::uint64_t transactions = 1;
  if (!results.front().ok() && begun && changes.size() > 1) {
    transactions = changes.size();
    for (std::size_t k = 0; k < changes.size(); ++k) results[k] = commit(&changes[k], 1, begun);
  }
  {
    const std::lock_guard lock(mutex_);
    figures_.transactions += transactions;
    figures_.changes += changes.size();
    figures_.healthy = results.back().ok();
  }
  for (std::size_t k = 0; k < changes.size(); ++k) changes[k].done.set_value(results[k]);
}

void JobJournal::write_all() {
  while (true) {
    std::vector<Change> changes;
    {
      std::unique_lock lock(mutex_);
      changed_.wait(lock, [this] { return stopping_ || !waiting_.empty(); });
      if (waiting_.empty()) return;
      changes.swap(waiting_);
    }
    settle(changes);
  }
}

}  // namespace stanchion::service
