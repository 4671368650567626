// The jobs and inputs in the database: what may follow what is decided here, in one statement each.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "service/database.hpp"
#include "service/job_record.hpp"

namespace stanchion::service {

/// What version of the tables this program writes.
inline constexpr int kSchemaVersion = 3;

/// Makes the tables, or brings those of an older version up to date, in one transaction. Throws
/// DatabaseError; also when the tables are of a newer version.
void migrate(Database& database);

struct JobFilter {
  std::optional<JobState> state;
  std::optional<std::string> command, continues, search;
};

struct JobPage {
  std::vector<JobRecord> jobs;
  std::int64_t total = 0;
  std::optional<std::int64_t> next;
};

struct InputRecord {
  std::string digest;
  std::int64_t bytes = 0, created_ms = 0, used_ms = 0;
  std::optional<std::string> name;
  bool needed = false;
};

/// Over one connection; not thread safe. Changes belong into a transaction (see JobJournal).
class JobTable {
 public:
  explicit JobTable(Database& database) : database_(database) {}

  /// False when the id or the idempotency key is taken. Sets `job.number`.
  bool insert(JobRecord& job);
  std::optional<JobRecord> find(const std::string& id);
  std::optional<JobRecord> find(std::int64_t number);
  std::optional<JobRecord> find_by_key(const std::string& idempotency_key);
  JobPage list(const JobFilter& filter, int limit, std::optional<std::int64_t> before);
  std::vector<std::int64_t> queued();
  std::vector<std::pair<std::string, std::int64_t>> count_by_state();

  /// Queued to running, one more attempt. False when it is not queued any more.
  bool begin(const JobRecord& job);
  /// Running to `job.state` with its exit code, headline, problem and files. False when it is not running.
  bool end(const JobRecord& job);
  /// Queued to cancelled. False when it is not queued any more.
  bool cancel_queued(const std::string& id, std::int64_t now_ms);
  /// Notes that a running job shall stop. False when it does not run.
  bool want_cancel(const std::string& id);
  /// Running back to queued, the attempt not counted: the service was shut down.
  bool put_back(std::int64_t number);
  /// Running back to queued for another attempt, `lost` when somebody killed this one. False when it does not
  /// run, or is to be cancelled.
  bool try_again(std::int64_t number, bool lost);
  /// False when it is there and has not ended.
  bool remove(const std::string& id);

  /// Deletes ended jobs until at most `kept` are left, the oldest first, `most` at a time; their ids.
  std::vector<std::string> remove_old(std::int64_t kept, std::int64_t most);

  /// After a crash: what ran is queued once more, or fails if it has lost an attempt before; what was to be
  /// cancelled is.
  void recover(std::int64_t now_ms);

  /// Writes something that changes nothing, to see whether the disk takes it.
  void touch();

  void put_input(const InputRecord& input);
  std::optional<InputRecord> find_input(const std::string& digest);
  void use_input(const std::string& digest, std::int64_t now_ms);
  /// False when a queued or running job needs it.
  bool remove_input(const std::string& digest);
  std::vector<InputRecord> list_inputs(int limit, std::int64_t offset);
  std::int64_t count_inputs();
  std::int64_t input_bytes();
  /// Not needed by any queued or running job, the least recently used first.
  std::vector<InputRecord> evictable_inputs(int limit);

 private:
  Database& database_;
};

}  // namespace stanchion::service
