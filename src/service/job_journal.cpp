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

Status JobJournal::commit(std::vector<Change>& changes) {
  try {
    writer_.execute("BEGIN IMMEDIATE");
    for (Change& change : changes) (*change.change)(*writer_table_);
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

void JobJournal::write_all() {
  while (true) {
    std::vector<Change> changes;
    {
      std::unique_lock lock(mutex_);
      changed_.wait(lock, [this] { return stopping_ || !waiting_.empty(); });
      if (waiting_.empty()) return;
      changes.swap(waiting_);
    }
    const Status status = commit(changes);
    {
      const std::lock_guard lock(mutex_);
      ++figures_.transactions;
      figures_.changes += changes.size();
      figures_.healthy = status.ok();
    }
    for (Change& change : changes) change.done.set_value(status);
  }
}

}  // namespace stanchion::service
