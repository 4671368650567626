#include "service/job_needs.hpp"

#include <algorithm>
#include <cmath>
#include <string>

#include "jobs/memory_need.hpp"
#include "model/byte_size.hpp"

namespace stanchion::service {
namespace {

constexpr Offset kMebi = Offset{1} << 20;
constexpr std::int64_t kSmallBytes = 512 << 10;
constexpr Offset kSmallMemory = 256 * kMebi;
constexpr double kSmallSeconds = 600;

const JobOption* option_of(const JobRequest& request, const char* key) {
  for (const JobOption& option : request.options) {
    if (option.key == key) return &option;
  }
  return nullptr;
}

std::optional<int> asked_threads(const JobRequest& request) {
  const JobOption* option = option_of(request, "threads");
  if (option == nullptr) return std::nullopt;
  return static_cast<int>(std::clamp(std::strtol(option->value.c_str(), nullptr, 10), 1L, 4096L));
}

/// How often the matrix may be factored, roughly.
double questions_of(const JobRequest& request) {
  double questions = 20;
  if (const JobOption* at = option_of(request, "at")) {
    questions += 3.0 * static_cast<double>(std::count(at->value.begin(), at->value.end(), ',') + 1);
  }
  for (const char* key : {"points", "first"}) {
    if (const JobOption* option = option_of(request, key))
      questions += 40 * std::strtod(option->value.c_str(), nullptr);
  }
  return questions;
}

std::int64_t seconds_within(double seconds, const MachineShare& share) {
  const auto most = static_cast<double>(share.cpu_seconds);
  return seconds < most ? static_cast<std::int64_t>(seconds)
                        : share.cpu_seconds;  // also of what is no number
}

}  // namespace

Result<std::optional<Offset>> memory_cap_of(const JobRequest& request) {
  const JobOption* option = option_of(request, "memory_cap");
  if (option == nullptr) return std::optional<Offset>();
  const auto bytes = parse_byte_size(option->value);
  if (!bytes.ok()) return bytes.status();
  return std::optional<Offset>(*bytes);
}

Offset least_memory(std::int64_t input_bytes, bool all_plain) {
  // An entry of 16 bytes in memory takes at most some 50 characters as text, mostly half of that.
  return all_plain ? input_bytes / 4 : 0;
}

std::optional<JobNeeds> needs_of_small(const JobRequest& request, std::int64_t input_bytes, bool all_plain,
                                       const MachineShare& share) {
  const auto cap = memory_cap_of(request);
  const int threads = std::min(asked_threads(request).value_or(1), share.processors);
  if (cap.ok() && *cap) {
    return JobNeeds{std::min(**cap, share.memory_bytes), share.cpu_seconds,
                    asked_threads(request).value_or(share.processors)};
  }
  if (!all_plain || input_bytes > kSmallBytes) return std::nullopt;
  return JobNeeds{std::min(kSmallMemory, share.memory_bytes),
                  seconds_within(kSmallSeconds + questions_of(request), share), threads};
}

JobNeeds needs_of_forecast(std::int64_t input_bytes, bool all_plain, const MachineShare& share) {
  // Compressed text may grow a thousandfold; tenfold is common. What needs more than this ends with a reason.
  const Offset inflated = all_plain ? input_bytes : 20 * input_bytes;
  const Offset bytes = 256 * kMebi + 8 * inflated;
  return {std::min(bytes, share.memory_bytes), std::min<std::int64_t>(3600, share.cpu_seconds), 1};
}

Offset bytes_expected(const JobRequest& request, const JobForecast& forecast) {
  return locates(request) ? std::max(forecast.bytes_solve, forecast.bytes_locate) : forecast.bytes_solve;
}

std::optional<JobNeeds> needs_of(const JobRequest& request, const JobForecast& forecast,
                                 const MachineShare& share) {
  const Offset least = forecast.bytes_count + 32 * kMebi;
  if (least > share.memory_bytes) return std::nullopt;
  JobNeeds needs;
  const Offset keeping = bytes_expected(request, forecast);
  const Offset comfortable = 128 * kMebi + keeping + keeping / 2;
  needs.memory_bytes = std::min(std::max(least, comfortable), share.memory_bytes);
  needs.threads = asked_threads(request).value_or(forecast.seconds > 0.5 ? share.processors : 1);
  needs.cpu_seconds =
      seconds_within(600 + 20 * forecast.seconds * share.processors * questions_of(request), share);
  return needs;
}

}  // namespace stanchion::service
