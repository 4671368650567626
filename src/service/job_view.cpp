#include "service/job_view.hpp"

#include <fmt/format.h>

#include <array>
#include <ctime>

#include "service/problem.hpp"

namespace stanchion::service {
namespace {

using Json = nlohmann::ordered_json;

template <class T>
Json or_null(const std::optional<T>& value) {
  return value ? Json(*value) : Json(nullptr);
}

Json time_or_null(const std::optional<std::int64_t>& time) {
  return time ? Json(time_to_text(*time)) : Json(nullptr);
}

}  // namespace

std::string time_to_text(std::int64_t milliseconds) {
  const std::time_t seconds = milliseconds / 1000;
  std::tm parts{};
  ::gmtime_r(&seconds, &parts);
  std::array<char, 32> text;
  std::strftime(text.data(), text.size(), "%Y-%m-%dT%H:%M:%S", &parts);
  return fmt::format("{}.{:03}Z", text.data(), milliseconds % 1000);
}

Json job_to_json(const JobRecord& job, const std::optional<JobProgress>& progress, bool with_request) {
  Json json;
  json["id"] = job.id;
  json["command"] = job.command;
  json["title"] = or_null(job.title);
  json["state"] = name_of(job.state);
  if (job.state == JobState::kRunning && job.cancel_wanted) json["cancelling"] = true;
  json["created"] = time_to_text(job.created_ms);
  json["started"] = time_or_null(job.started_ms);
  json["finished"] = time_or_null(job.finished_ms);
  json["attempts"] = job.attempts;
  json["continues"] = or_null(job.continues);
  json["progress"] = nullptr;
  if (progress && job.state == JobState::kRunning) {
    json["progress"] = {{"phase", progress->phase}, {"done", progress->done}, {"total", progress->total}};
  }
  json["forecast"] = nullptr;
  if (job.forecast_bytes || job.forecast_seconds) {
    json["forecast"] = {{"seconds", or_null(job.forecast_seconds)},
                        {"peak_bytes", or_null(job.forecast_bytes)}};
  }
  json["memory_bytes"] = or_null(job.memory_bytes);
  json["exit_code"] = or_null(job.exit_code);
  json["headline"] = or_null(job.headline);
  json["problem"] = job.problem ? Json::parse(problem_to_text(*job.problem)) : Json(nullptr);
  json["files"] = job.files;
  if (with_request) json["request"] = Json::parse(job.request, nullptr, false);
  return json;
}

}  // namespace stanchion::service
