// What comes of a child that has ended: a forecast, an answer, another attempt or a reason.
#include <fmt/format.h>

#include <filesystem>
#include <fstream>
#include <nlohmann/json.hpp>

#include "model/byte_size.hpp"
#include "service/job_runner.hpp"

namespace stanchion::service {
namespace {

std::optional<JobForecast> read_forecast(const std::string& path) {
  std::ifstream file(path);
  const auto json = nlohmann::json::parse(file, nullptr, false);
  if (!json.is_object() || !json.contains("forecast") || !json["forecast"].is_object()) return std::nullopt;
  const auto& forecast = json["forecast"];
  const auto number = [&forecast](const char* key) {
    return forecast.contains(key) && forecast[key].is_number() ? forecast[key].get<double>() : 0.0;
  };
  return JobForecast{static_cast<Offset>(number("peak_bytes_count")),
                     static_cast<Offset>(number("peak_bytes_solve")), number("seconds"),
                     static_cast<Offset>(number("peak_bytes_locate"))};
}

JobProblem problem_of(const ChildEnd& end, const JobNeeds& needs) {
  JobProblem problem{500, "failed", end.reason, "", ""};
  if (end.failure) {
    problem = {422, end.failure->code, end.failure->message, end.failure->place, end.failure->remedy};
    if (end.failure->kind == "resource_limit") problem.status = 507;
    if (end.failure->kind == "internal") problem.status = 500;
  }
  switch (end.kind) {
    case ChildEndKind::kMemory:
      problem = {507, "memory-limit", end.reason, "",
                 "allow more: the request's memory_cap, or the service's --memory-cap"};
      break;
    case ChildEndKind::kCpuTime:
      problem = {507, "cpu-limit", end.reason, "",
                 fmt::format("ask for less in one job, or raise the service's --cpu-cap; this job had {} s",
                             needs.cpu_seconds)};
      break;
    case ChildEndKind::kKilled:
      problem = {507, "killed", end.reason + ", and so was the attempt before", "",
                 "the system's log tells whether memory ran out; if not, submit it again"};
      break;
    case ChildEndKind::kCrashed:
      problem.code = "crashed";
      problem.remedy = "please report it, with the inputs";
      break;
    default:
      break;
  }
  if (problem.detail.empty()) problem.detail = fmt::format("it ended with exit code {}", end.exit_code);
  return problem;
}

}  // namespace

void JobRunner::forecast_ended(Active active, const ChildEnd& end) {
  const std::string folder = folder_of(active.job);
  const auto forecast = end.kind == ChildEndKind::kExited && end.exit_code == 0
                            ? read_forecast(folder + "/" + kForecastFile)
                            : std::nullopt;
  std::error_code failure;
  std::filesystem::remove_all(folder, failure);
  if (active.stop_asked) return;  // cancelled, or the service ends: it stays as the journal has it
  Waiting again = active.waiting.once_more();
  ++again.forecasts.made;
  if (forecast) {
    again.forecast = forecast;
    again.least_bytes = 0;
    waiting_.push_front(again);
    return;
  }
  if (const auto memory =
          memory_of_next_attempt(end, again.forecasts, active.needs.memory_bytes, active.most_bytes)) {
    again.least_bytes = *memory;
    if (end.kind == ChildEndKind::kKilled) ++again.forecasts.lost;
    parts_.log({"forecast-repeated", end.reason + "; once more", active.job.id, LogLevel::kWarning});
    waiting_.push_front(again);
    return;
  }
  fail(active.job, problem_of(end, active.needs), false);
}

/// Puts the job back into the queue, at its head, when it is worth another attempt.
bool JobRunner::try_again(const Active& active, const ChildEnd& end) {
  const auto memory = memory_of_next_attempt(end, {active.job.attempts, active.job.lost},
                                             active.needs.memory_bytes, active.most_bytes);
  if (!memory) return false;
  JobRecord job = active.job;
  bool queued = false;
  const bool lost = end.kind == ChildEndKind::kKilled;
  const Status status =
      parts_.journal.write([&](JobTable& table) { queued = table.try_again(job.number, lost); });
  if (!status.ok() || !queued) return false;
  Waiting again = active.waiting.once_more();
  again.least_bytes = *memory;
  waiting_.push_front(again);
  job.state = JobState::kQueued;
  job.started_ms.reset();
  parts_.log({"job-repeated", fmt::format("{}; once more with {}", end.reason, size_allowed(*memory)), job.id,
              LogLevel::kWarning});
  parts_.feed.publish("job", job.id, job_to_json(job, {}, false).dump());
  return true;
}

void JobRunner::ended(Active active, const ChildEnd& end) {
  JobRecord& job = active.job;
  {
    const std::lock_guard lock(mutex_);
    progress_.erase(job.number);
  }
  const bool answered =
      end.kind == ChildEndKind::kExited && (end.exit_code == 0 || end.exit_code == 1 || end.exit_code == 3);
  if (!answered && active.stop_asked && !job.cancel_wanted) {
    const Status status = parts_.journal.write([&](JobTable& table) { table.put_back(job.number); });
    if (status.ok()) {
      parts_.log({"job-put-back", "stopped with the service, waits for the next one", job.id});
    } else {
      parts_.log({"store-failed", status.message(), job.id, LogLevel::kError});
    }
    return;
  }
  if (!answered && !active.stop_asked && try_again(active, end)) return;
  job.exit_code = end.exit_code;
  job.state = answered ? JobState::kDone : active.stop_asked ? JobState::kCancelled : JobState::kFailed;
  if (job.state == JobState::kFailed) job.problem = problem_of(end, active.needs);
  parts_.finisher.finish({job, folder_of(job), true, end.cpu_seconds});
}

}  // namespace stanchion::service
