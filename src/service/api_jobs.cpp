// Jobs: submit, look, cancel, delete, fetch their files.
#include <fcntl.h>
#include <fmt/format.h>
#include <sys/random.h>
#include <sys/stat.h>

#include <algorithm>
#include <charconv>
#include <filesystem>

#include "base/digest.hpp"
#include "jobs/strict_json.hpp"
#include "model/byte_size.hpp"
#include "service/api.hpp"
#include "service/api_parameters.hpp"
#include "service/problem.hpp"

namespace stanchion::service {
namespace {

constexpr std::size_t kLongestTitle = 500;  // lists and events carry it

/// Sorts by time, cannot be guessed.
std::string new_id() {
  std::uint64_t random = 0;
  if (::getrandom(&random, sizeof random, 0) != sizeof random)
    random = static_cast<std::uint64_t>(now_ms()) * 2654435761U;
  return fmt::format("j-{:011x}-{:012x}", now_ms(), random & 0xffffffffffffU);
}

bool is_json_type(const std::string& field) {
  std::string type;
  for (const char c : field) {
    if (c != ' ' && c != '\t') type += c >= 'A' && c <= 'Z' ? static_cast<char>(c - 'A' + 'a') : c;
  }
  return type == "application/json" || type == "application/json;charset=utf-8";
}

HttpResponse unknown_job() {
  return problem_response(404, "unknown-job", "there is no such job", "GET /v1/jobs lists those there are");
}

HttpResponse accepted(const JobRecord& job, bool replayed) {
  HttpResponse response = json_response(202, job_to_json(job, {}, true));
  response.fields.emplace_back("Location", "/v1/jobs/" + job.id);
  if (replayed) response.fields.emplace_back("Idempotency-Replayed", "true");
  return response;
}

}  // namespace

std::optional<JobRecord> Api::find_job(const std::string& id, HttpResponse& refusal) const {
  std::optional<JobRecord> job;
  const Status status = parts_.journal.read([&](JobTable& table) { job = table.find(id); });
  if (!status.ok()) refusal = problem_response(status);
  if (status.ok() && !job) refusal = unknown_job();
  return job;
}

Result<JobRecord> Api::read_submission(const std::string& body) {
  auto json = strict_json(body);
  if (!json.ok()) return json.status();
  JobRecord job;
  if (json->is_object() && json->contains("continues")) {
    const auto& continues = (*json)["continues"];
    if (!continues.is_string() || !is_job_id(continues.get<std::string>())) {
      return Status::bad_input("bad-request", "'continues' has to be the id of a job", "continues",
                               "leave it out");
    }
    job.continues = continues.get<std::string>();
    json->erase("continues");
  }
  auto request = parse_request(json->dump(), parts_.options.rules, false);
  if (!request.ok()) return request.status();
  if (request->id.empty()) request->id = new_id();
  job.id = request->id;
  job.command = request->command;
  for (const JobOption& option : request->options) {
    if (option.key != "title") continue;
    if (option.value.size() > kLongestTitle) {
      return Status::bad_input("bad-request", fmt::format("a title has at most {} bytes", kLongestTitle),
                               "options/title", "shorten it");
    }
    job.title = option.value;
  }
  if (auto problem = settle_inputs(*request, job)) {
    return Status::bad_input(problem->code, problem->detail, problem->place, problem->remedy);
  }
  job.request = request_to_json(*request);
  return job;
}

/// Names every input in the one way, and sees that all are there and that the job can ever fit.
std::optional<JobProblem> Api::settle_inputs(JobRequest& request, JobRecord& job) {
  const auto problem = [](const Status& status) {
    return JobProblem{422, status.code(), status.message(), status.place(), status.remedy()};
  };
  for (JobInput& input : request.inputs) {
    if (digest_in(input.path)) continue;
    const auto name = parts_.roots.name_of(input.path);
    if (!name.ok()) return problem(name.status());
    input.path = *name;
  }
  const auto open = OpenInputs::open(request, parts_.roots, parts_.inputs);
  if (!open.ok()) return problem(open.status());
  job.inputs = open->digests();
  const auto cap = memory_cap_of(request);
  if (!cap.ok()) return problem(cap.status());
  const Offset least = std::max(cap->value_or(0), least_memory(open->bytes(), open->all_plain()));
  if (least > parts_.options.share.memory_bytes) {
    return JobProblem{413, "memory-limit",
                      fmt::format("it takes {} of memory, and all jobs together may use {}",
                                  size_needed(least), size_allowed(parts_.options.share.memory_bytes)),
                      "", "start the service with a larger --memory-cap, on a larger machine"};
  }
  return std::nullopt;
}

HttpResponse Api::submit(const Call& call) {
  if (closing_) return problem_response(503, "closing", "the service is being shut down");
  const RequestHead& head = call.request.head;
  if (!is_json_type(head.field("content-type"))) {
    return problem_response(415, "content-type", "a request is JSON", "send Content-Type: application/json",
                            "Content-Type");
  }
  const std::string& key = head.field("idempotency-key");
  if (key.size() > 200) {
    return problem_response(400, "bad-request", "an idempotency key has at most 200 characters", "",
                            "Idempotency-Key");
  }
  HttpResponse refusal;
  const auto body = read_text(call.request, refusal);
  if (!body.ok()) return refusal;
  auto job = read_submission(*body);
  if (!job.ok()) {
    const Status& status = job.status();
    int code = 400;
    for (const char* other :
         {"outside-roots", "file-not-found", "not-a-file", "cannot-read", "unknown-input"}) {
      if (status.code() == other) code = 422;
    }
    if (status.code() == "memory-limit") code = 413;
    return problem_response({code, status.code(), status.message(), status.place(), status.remedy()});
  }
  if (!key.empty()) job->idempotency_key = printable(key);
  job->request_digest = sha256(*body);
  job->created_ms = now_ms();
  return insert(*job);
}

HttpResponse Api::insert(JobRecord& job) {
  if (parts_.runner.figures().waiting >= parts_.options.queued_jobs) {
    return problem_response(429, "queue-full", "as many jobs wait as may", "wait until some have ended");
  }
  std::optional<JobRecord> earlier;
  bool missing = false, inserted = false;
  const Status status = parts_.journal.write([&](JobTable& table) {
    if (job.idempotency_key) earlier = table.find_by_key(*job.idempotency_key);
    if (earlier) return;
    for (const std::string& digest : job.inputs) missing = missing || !table.find_input(digest);
    if (!missing) inserted = table.insert(job);
  });
  if (!status.ok()) return problem_response(status);
  if (earlier) {
    if (earlier->request_digest != job.request_digest) {
      return problem_response(422, "idempotency-key", "this idempotency key was used for another request",
                              "choose a new one", "Idempotency-Key");
    }
    return accepted(*earlier, true);
  }
  if (missing)
    return problem_response(422, "unknown-input", "an input was dropped just now", "upload it again");
  if (!inserted)
    return problem_response(409, "id-taken", "there is a job with this id", "choose another one", "id");
  parts_.runner.enqueue(job.number);
  parts_.feed.publish("job", job.id, job_to_json(job, {}, false).dump());
  return accepted(job, false);
}

HttpResponse Api::list_jobs(const Call& call) {
  const RequestHead& head = call.request.head;
  HttpResponse refusal;
  const auto limit = whole_parameter(head, "limit", 50, 1, 500, refusal);
  const auto before = whole_parameter(head, "cursor", INT64_MAX, 0, INT64_MAX, refusal);
  if (!limit || !before) return refusal;
  JobFilter filter{{}, head.parameter("command"), head.parameter("continues"), head.parameter("search")};
  if (const auto state = head.parameter("state")) {
    filter.state = job_state_of(*state);
    if (!filter.state) {
      return problem_response(400, "bad-request", "'state' is no state of a job",
                              "one of queued, running, done, failed, cancelled", "state");
    }
  }
  JobPage page;
  const Status status = parts_.journal.read(
      [&](JobTable& table) { page = table.list(filter, static_cast<int>(*limit), *before); });
  if (!status.ok()) return problem_response(status);
  nlohmann::ordered_json json = {
      {"jobs", nlohmann::ordered_json::array()}, {"total", page.total}, {"next", nullptr}};
  for (const JobRecord& job : page.jobs) {
    json["jobs"].push_back(job_to_json(job, parts_.runner.progress_of(job.number), false));
  }
  if (page.next) json["next"] = std::to_string(*page.next);
  return json_response(200, json);
}

HttpResponse Api::get_job(const Call& call) {
  HttpResponse refusal;
  const auto job = find_job(call.id, refusal);
  if (!job) return refusal;
  return json_response(200, job_to_json(*job, parts_.runner.progress_of(job->number), true));
}

HttpResponse Api::delete_job(const Call& call) {
  HttpResponse refusal;
  const auto job = find_job(call.id, refusal);
  if (!job) return refusal;
  bool removed = false;
  const Status status = parts_.journal.write([&](JobTable& table) { removed = table.remove(call.id); });
  if (!status.ok()) return problem_response(status);
  if (!removed) {
    return problem_response(409, "job-active", "this job has not ended",
                            "cancel it first: POST /v1/jobs/ID/cancel");
  }
  std::error_code failure;
  std::filesystem::remove_all(parts_.options.store + "/jobs/" + job->id, failure);
  parts_.feed.publish("removed", job->id, nlohmann::json({{"id", job->id}}).dump());
  HttpResponse response;
  response.status = 204;
  return response;
}

HttpResponse Api::cancel_job(const Call& call) {
  HttpResponse refusal;
  const auto body = read_text(call.request, refusal);
  if (!body.ok()) return refusal;
  std::optional<JobRecord> job;
  bool waited = false, runs = false;
  const Status status = parts_.journal.write([&](JobTable& table) {
    waited = table.cancel_queued(call.id, now_ms());
    runs = !waited && table.want_cancel(call.id);
    job = table.find(call.id);
  });
  if (!status.ok()) return problem_response(status);
  if (!job) return unknown_job();
  if (!waited && !runs) return problem_response(409, "job-ended", "this job has ended", "it can be deleted");
  parts_.runner.cancel(job->number);
  parts_.feed.publish("job", job->id, job_to_json(*job, {}, false).dump());
  return json_response(202, job_to_json(*job, {}, true));
}

HttpResponse Api::get_file(const Call& call) {
  HttpResponse refusal;
  const auto job = find_job(call.id, refusal);
  if (!job) return refusal;
  const JobFile* file = job_file(call.name);
  if (file == nullptr) return problem_response(404, "not-found", "no job has a file of this name");
  const bool live = job->state == JobState::kRunning && (call.name == "log" || call.name == "text");
  const bool listed = std::find(job->files.begin(), job->files.end(), call.name) != job->files.end();
  const std::string path = parts_.options.store + "/jobs/" + job->id + "/" + file->file;
  FileHandle handle;
  if (live || listed) handle = FileHandle(::open(path.c_str(), O_RDONLY | O_CLOEXEC | O_NOFOLLOW));
  struct stat facts {};
  if (!handle || ::fstat(handle.get(), &facts) != 0) {
    return problem_response(
        404, "no-such-file", "this job has no file of this name",
        is_ended(job->state) ? "`files` of the job lists those it has" : "wait until it has ended");
  }
  HttpResponse response;
  response.content_type = file->content_type;
  response.fields.emplace_back("Content-Disposition",
                               fmt::format("inline; filename=\"{}-{}\"", job->id, file->file));
  if (call.name == "report" || call.name == "svg") {
    // Drawings and styles of its own, nothing from anywhere, and no script.
    response.fields.emplace_back(
        "Content-Security-Policy",
        "default-src 'none'; style-src 'unsafe-inline'; img-src data:; base-uri 'none'; "
        "form-action 'none'; frame-ancestors 'none'; sandbox");
  }
  response.file_bytes = static_cast<std::uint64_t>(facts.st_size);
  response.file = handle.release();
  return response;
}

}  // namespace stanchion::service
