// Many jobs, as many at a time as their memory allows, each in a child process of its own.
#pragma once

#include <functional>
#include <map>
#include <string>
#include <vector>

#include "base/cancellation.hpp"
#include "jobs/job_digest.hpp"
#include "jobs/job_list.hpp"
#include "jobs/result_file.hpp"

namespace stanchion {

struct BatchOptions {
  std::string program = "/proc/self/exe";
  std::string work_folder;  ///< for what is under way and for the analysis store; made, and gone at the end
  std::string analysis_store;             ///< empty: in the work folder
  Offset store_bytes = Offset{20} << 30;  ///< that the analysis store may hold
  std::string reports;                    ///< folder for a page a job, ID.html; empty: none
  std::string certificates;  ///< folder for a certificate a job, ID.json, where the command makes one
  std::string logs;          ///< folder for a log a job, ID.log; empty: none
  Offset memory_cap = 0;     ///< of all jobs together
  int processors = 1;        ///< threads of all jobs together
  std::optional<std::int64_t> cpu_seconds;  ///< of one job
};

struct BatchProgress {
  std::size_t jobs = 0, recorded = 0, running = 0;
  double fraction = 0;
};

struct BatchContext {
  const CancellationToken* cancel = nullptr;
  std::function<void(const BatchProgress&)> progress;
  std::function<void(const std::string& id, const std::string& text)> log;
};

/// Runs `jobs` and appends each result to `results` as it comes. A job that fails, crashes or meets a limit
/// is recorded with its reason and stops nothing. A job waits until its forecast fits beside those that run;
/// one that was killed for memory that its forecast had not foreseen is tried again with twice as much, up to
/// the cap. Fails only when results cannot be written (resource limit) or no child can be started;
/// Interrupted when `cancel` fires: what has finished is recorded, what runs is stopped and not recorded. The
/// results of this run, in the order they came. Call from a thread that lives as long as the call.
Status run_batch(const std::vector<const ListedJob*>& jobs, const RequestRules& rules,
                 const BatchOptions& options, const BatchContext& context, FileDigests& files,
                 ResultFile& results, std::vector<JobResult>& recorded);

}  // namespace stanchion
