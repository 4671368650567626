// What became of a batch: for people, for programs, for build servers.
#pragma once

#include <string>
#include <vector>

#include "jobs/result_file.hpp"

namespace stanchion {

struct BatchSummary {
  std::vector<std::string> arguments;
  std::string jobs_path, results_path;
  std::vector<JobResult> results;        ///< in the order of the jobs
  std::vector<std::string> not_run;      ///< ids without a result
  std::size_t taken_over = 0;            ///< results of an earlier run
  std::size_t damaged = 0, doubled = 0;  ///< see ResultFile::Found
  std::string shard;                     ///< "2/5"; empty: all jobs
  double seconds = 0;                    ///< of this run
  bool interrupted = false;
};

/// Of two exit codes the one that tells more: 5, 4, 2, 3, 1, 0 in this order.
int worse_code(int one, int other);

/// The worst of all; 130 when interrupted; at least 3 when jobs have no result.
int exit_code_of(const BatchSummary& summary);

std::string batch_text(const BatchSummary& summary);

/// Described by data/schemas/batch-1.json.
std::string batch_json(const BatchSummary& summary);

/// One test case a job: not good is a failure; unresolved, refused and crashed are errors; without a result
/// is skipped.
std::string batch_junit(const BatchSummary& summary);

}  // namespace stanchion
