// The file of a batch: one request a line.
#pragma once

#include <string>
#include <string_view>
#include <vector>

#include "jobs/job_request.hpp"

namespace stanchion {

struct ListedJob {
  JobRequest request;  ///< its paths resolved
  std::size_t line = 0;
};

/// Every line of `text` (blank lines are passed over), which came from the file `name`; relative paths count
/// from `folder`. Bad input "bad-jobs" that tells of all bad lines at once (the first fifty in words), each
/// with its number, key and remedy; also for an id that comes twice and for a file without a job.
Result<std::vector<ListedJob>> read_job_list(std::string_view text, const std::string& name,
                                             const std::string& folder, const RequestRules& rules);

}  // namespace stanchion
