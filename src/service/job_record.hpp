// One job as the store keeps it.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <vector>

namespace stanchion::service {

enum class JobState { kQueued, kRunning, kDone, kFailed, kCancelled };

const char* name_of(JobState state);
std::optional<JobState> job_state_of(const std::string& name);
inline bool is_ended(JobState state) {
  return state != JobState::kQueued && state != JobState::kRunning;
}

/// Why something was not done, for a person; see problem.hpp for its form over HTTP.
struct JobProblem {
  int status = 500;
  std::string code, detail, place, remedy;
};

struct JobRecord {
  std::int64_t number = 0;  ///< in the order of submission
  std::string id, command;
  std::optional<std::string> title, continues;
  std::string request;  ///< JSON, with inputs as they were named
  JobState state = JobState::kQueued;
  std::int64_t created_ms = 0;  ///< since 1970
  std::optional<std::int64_t> started_ms, finished_ms;
  int attempts = 0;
  int lost = 0;  ///< attempts that the end of the service, or a kill from outside, cut short
  bool cancel_wanted = false;
  std::optional<std::int64_t> memory_bytes, forecast_bytes;
  std::optional<double> forecast_seconds;
  std::optional<int> exit_code;
  std::optional<std::string> headline;
  std::optional<JobProblem> problem;
  std::vector<std::string> files;   ///< names of API files that exist
  std::vector<std::string> inputs;  ///< digests of uploaded inputs that it names
  std::optional<std::string> idempotency_key, request_digest;
};

}  // namespace stanchion::service
