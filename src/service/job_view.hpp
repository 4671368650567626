// A job as the API shows it.
#pragma once

#include <nlohmann/json.hpp>
#include <optional>
#include <string>

#include "service/job_record.hpp"

namespace stanchion::service {

/// How far a running job is.
struct JobProgress {
  std::string phase;
  double done = 0, total = 1;
};

nlohmann::ordered_json job_to_json(const JobRecord& job, const std::optional<JobProgress>& progress,
                                   bool with_request);

/// "2026-03-02T09:14:07.312Z".
std::string time_to_text(std::int64_t milliseconds);

}  // namespace stanchion::service
