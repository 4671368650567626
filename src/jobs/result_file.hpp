// The results of a batch: one JSON object a line, on the disk before the next job is looked at.
#pragma once

#include <functional>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "jobs/child_process.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// What is recorded about one job, described by data/schemas/result-1.json.
struct JobResult {
  std::string id, command;
  std::optional<std::string> digest;  ///< absent: an input could not be read
  int exit_code = 0;
  std::string reason;  ///< in plain words; empty when it answered
  std::optional<ChildFailure> failure;
  double seconds = 0, cpu_seconds = 0;
  Offset peak_bytes = 0;
  int attempts = 1;
  std::string finished;  ///< UTC, "2026-12-01T16:03:00Z"
};

/// One line without its end; `outcome` is a whole JSON document (data/schemas/outcome-1.json) or empty.
std::string result_line(const JobResult& result, std::string_view outcome);

/// Nothing when the line is damaged.
std::optional<JobResult> read_result_line(std::string_view line);

/// The finish time to record: now.
std::string utc_now();

/// Appends to a file that only one process has open at a time.
class ResultFile {
 public:
  struct Found {
    std::vector<JobResult> results;  ///< the first of every id
    std::size_t damaged = 0;         ///< lines that a kill or a crash left half-written; removed
    std::size_t doubled = 0;         ///< further records of an id; removed
  };

  ResultFile() = default;
  ResultFile(ResultFile&& other) noexcept;
  ResultFile& operator=(ResultFile&& other) noexcept;
  ~ResultFile();

  /// Opens or makes the file and takes its lock. Bad usage "cannot-write"; resource limit "in-use" when
  /// another process holds it.
  static Result<ResultFile> open(const std::string& path);

  /// Reads what is there and mends it: damaged and doubled records go, and those that `keep` turns down. The
  /// file is replaced in one step where anything changes. Resource limit "write-failed".
  Result<Found> recover(const std::function<bool(const JobResult&)>& keep);

  bool empty() const;

  /// The line and its end, flushed to the disk. Resource limit "write-failed"; what was written of it is then
  /// taken back as far as the disk allows.
  Status append(const std::string& line);

 private:
  std::string path_;
  int file_ = -1;
};

/// Reads results for a merge: calls `take` with each good line. Bad input "file-not-found", "bad-results".
Status read_results(const std::string& path,
                    const std::function<Status(const JobResult&, std::string_view line)>& take);

}  // namespace stanchion
