// Digests of jobs, worked out beside the thread that looks after the jobs.
#pragma once

#include <array>
#include <condition_variable>
#include <deque>
#include <mutex>
#include <string>
#include <thread>
#include <vector>

#include "base/cancellation.hpp"
#include "base/file_handle.hpp"
#include "jobs/job_digest.hpp"
#include "jobs/job_list.hpp"

namespace stanchion {

struct JobDigests {
  const ListedJob* job = nullptr;
  Result<std::string> digest = std::string();
  std::string model;  ///< of what its forecast depends on; empty without a digest
};

/// Small inputs and large ones are read by a thread each, so that a large input holds up other large ones
/// only.
class DigestLanes {
 public:
  /// `files` and `rules` outlive it.
  DigestLanes(FileDigests& files, const RequestRules& rules);
  /// Gives up what is being read.
  ~DigestLanes();
  DigestLanes(const DigestLanes&) = delete;
  DigestLanes& operator=(const DigestLanes&) = delete;

  /// `job` outlives the answer.
  void ask(const ListedJob* job);

  /// What has come since the last call. The error of a digest is that of digest_of.
  std::vector<JobDigests> answers();

  /// Readable as long as answers wait.
  int handle() const { return wake_.get(); }

 private:
  struct Lane {
    std::deque<const ListedJob*> jobs;
    std::thread thread;
  };

  void work(Lane& lane);
  JobDigests digests_of(const ListedJob* job);

  FileDigests& files_;
  const RequestRules& rules_;
  FileHandle wake_;
  CancellationToken stop_;
  std::mutex mutex_;
  std::condition_variable changed_;
  std::vector<JobDigests> answers_;
  std::array<Lane, 2> lanes_;  ///< of small inputs, of large ones
};

}  // namespace stanchion
