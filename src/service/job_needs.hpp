// What a job may use: memory, processor time, threads, from its inputs or from its forecast.
#pragma once

#include <cstdint>
#include <optional>

#include "jobs/job_request.hpp"
#include "stanchion/types.hpp"

namespace stanchion::service {

/// What `stanchion forecast` said.
struct JobForecast {
  Offset bytes_count = 0;  ///< counting alone
  Offset bytes_solve = 0;  ///< keeping the factor
  double seconds = 0;
  Offset bytes_locate = 0;  ///< keeping the factor and vectors beside it
};

struct MachineShare {
  Offset memory_bytes = 0;  ///< of all jobs together
  int processors = 1;
  std::int64_t cpu_seconds = 86'400;  ///< most of one job
};

struct JobNeeds {
  Offset memory_bytes = 0;
  std::int64_t cpu_seconds = 0;
  int threads = 1;
};

/// Of a job so small that working out a forecast would take longer than itself, or whose memory its request
/// limits; nothing when a forecast is needed. Compressed files are never small: what is in them is not known.
std::optional<JobNeeds> needs_of_small(const JobRequest& request, std::int64_t input_bytes, bool all_plain,
                                       const MachineShare& share);

/// Of working out the forecast itself: the matrix in memory, some times over.
JobNeeds needs_of_forecast(std::int64_t input_bytes, bool all_plain, const MachineShare& share);

/// Memory that the job is forecast to take: more than the factor where directions are located.
Offset bytes_expected(const JobRequest& request, const JobForecast& forecast);

/// With a forecast; nothing when the job can never get what it needs.
std::optional<JobNeeds> needs_of(const JobRequest& request, const JobForecast& forecast,
                                 const MachineShare& share);

/// The least that any job of plain files needs; more than the machine's share can be refused at once.
Offset least_memory(std::int64_t input_bytes, bool all_plain);

/// The memory limit that a request sets itself; bad usage "bad-size".
Result<std::optional<Offset>> memory_cap_of(const JobRequest& request);

}  // namespace stanchion::service
