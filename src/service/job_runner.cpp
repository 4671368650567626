#include "service/job_runner.hpp"

#include <fmt/format.h>
#include <poll.h>
#include <sys/eventfd.h>

#include <algorithm>
#include <filesystem>

#include "jobs/memory_need.hpp"
#include "model/byte_size.hpp"

namespace stanchion::service {
namespace {

constexpr std::size_t kLookAhead = 64;  // jobs behind the first that may be preferred while it does not fit
constexpr auto kPatience = std::chrono::seconds(30);     // then the first one is waited for
constexpr auto kStopWait = std::chrono::seconds(10);     // between asking a child to stop and ending it
constexpr auto kPause = std::chrono::milliseconds(100);  // for want of disk or memory, most likely
constexpr auto kTellEvery = std::chrono::milliseconds(250);
constexpr int kNiceness = 10;  // answering comes before computing

/// The question about the same matrices, as they stand, that the forecast command can answer.
JobRequest forecast_without_options(const JobRequest& request, const RequestRules& rules) {
  JobRequest forecast = forecast_request(request, rules);
  forecast.options.clear();
  return forecast;
}

bool has_option(const JobRequest& request, const char* key) {
  return std::any_of(request.options.begin(), request.options.end(),
                     [key](const JobOption& option) { return option.key == key; });
}

}  // namespace

JobRunner::JobRunner(RunnerParts parts)
    : parts_(std::move(parts)), wake_(::eventfd(0, EFD_CLOEXEC | EFD_NONBLOCK)) {
  thread_ = std::thread([this] { run(); });
}

JobRunner::~JobRunner() {
  stop(std::chrono::milliseconds(0));
  ::close(wake_);
}

namespace {

void wake_up(int handle) {
  const std::uint64_t one = 1;
  [[maybe_unused]] const ssize_t written = ::write(handle, &one, sizeof one);
}

}  // namespace

void JobRunner::enqueue(std::int64_t number) {
  {
    const std::lock_guard lock(mutex_);
    arrived_.push_back(number);
    ++figures_.waiting;
  }
  wake_up(wake_);
}

void JobRunner::cancel(std::int64_t number) {
  {
    const std::lock_guard lock(mutex_);
    cancelled_.push_back(number);
  }
  wake_up(wake_);
}

std::optional<JobProgress> JobRunner::progress_of(std::int64_t number) const {
  const std::lock_guard lock(mutex_);
  const auto found = progress_.find(number);
  if (found == progress_.end()) return std::nullopt;
  return found->second;
}

RunnerFigures JobRunner::figures() const {
  const std::lock_guard lock(mutex_);
  return figures_;
}

void JobRunner::stop(std::chrono::milliseconds grace) {
  if (!thread_.joinable()) return;
  {
    const std::lock_guard lock(mutex_);
    stopping_ = true;
    stop_at_ = Clock::now() + grace;
  }
  wake_up(wake_);
  thread_.join();
}

void JobRunner::run() {
  std::string last_failure;  // said once, however often it comes
  while (true) {
    try {
      take_commands();
      bool stopping = false;
      {
        const std::lock_guard lock(mutex_);
        stopping = stopping_;
        figures_.waiting = static_cast<std::int64_t>(waiting_.size());
        figures_.running = static_cast<std::int64_t>(active_.size());
        figures_.memory_bytes = memory_in_use_;
      }
      if (stopping && active_.empty()) return;
      if (!stopping) start_some();
      last_failure.clear();
      wait_and_look();
    } catch (const std::exception& error) {
      if (last_failure != error.what()) parts_.log({"runner-failed", error.what(), "", LogLevel::kError});
      last_failure = error.what();
      std::this_thread::sleep_for(kPause);
    }
  }
}

void JobRunner::take_commands() {
  std::vector<std::int64_t> arrived, cancelled;
  bool stop_now = false;
  {
    const std::lock_guard lock(mutex_);
    arrived.swap(arrived_);
    cancelled.swap(cancelled_);
    stop_now = stopping_ && Clock::now() >= stop_at_;
  }
  for (const std::int64_t number : arrived) {
    waiting_.emplace_back();
    waiting_.back().number = number;
  }
  if (!cancelled.empty()) {
    std::sort(cancelled.begin(), cancelled.end());
    const auto is_cancelled = [&cancelled](const Waiting& waiting) {
      return std::binary_search(cancelled.begin(), cancelled.end(), waiting.number);
    };
    waiting_.erase(std::remove_if(waiting_.begin(), waiting_.end(), is_cancelled), waiting_.end());
  }
  for (Active& active : active_) {
    const bool wanted = std::find(cancelled.begin(), cancelled.end(), active.job.number) != cancelled.end();
    if (wanted) active.job.cancel_wanted = true;
    if ((wanted || stop_now) && !active.stop_asked) {
      active.stop_asked = true;
      active.child->stop();
      active.kill_at = Clock::now() + kStopWait;
    }
  }
}

bool JobRunner::fits(const JobNeeds& needs) const {
  if (active_.empty()) return true;
  // Twice the processors: while one job is being begun or ended on disk, another one computes.
  return memory_in_use_ + needs.memory_bytes <= parts_.share.memory_bytes &&
         threads_in_use_ + needs.threads <= 2 * parts_.share.processors;
}

void JobRunner::fail(JobRecord job, JobProblem problem, bool has_begun) {
  job.state = JobState::kFailed;
  job.exit_code = problem.status == 507 ? 4 : problem.status == 500 ? 5 : 2;
  job.problem = std::move(problem);
  job.started_ms = job.started_ms ? job.started_ms : now_ms();
  parts_.finisher.finish({job, folder_of(job), has_begun, 0});
}

/// Reads the job and opens its inputs. Nothing when it is not to be run: cancelled, or failed by now.
std::optional<JobRunner::Prepared> JobRunner::prepare(Waiting waiting) {
  Prepared prepared{waiting, {}, {}};
  std::optional<JobRecord> job;
  const Status read = parts_.journal.read([&](JobTable& table) { job = table.find(waiting.number); });
  if (!read.ok()) throw std::runtime_error(read.message());
  if (!job || job->state != JobState::kQueued) return std::nullopt;
  prepared.active.job = *job;
  auto request = parse_request(job->request, parts_.rules);
  if (!request.ok()) {
    // Accepted by another version of the program.
    fail(*job,
         {422, request.status().code(), request.status().message(), request.status().place(),
          request.status().remedy()},
         false);
    return std::nullopt;
  }
  prepared.request = *request;
  auto inputs = OpenInputs::open(*request, parts_.roots, parts_.inputs);
  if (!inputs.ok()) {
    fail(*job,
         {422, inputs.status().code(), inputs.status().message(), inputs.status().place(),
          inputs.status().remedy()},
         false);
    return std::nullopt;
  }
  prepared.active.inputs = std::move(*inputs);
  const OpenInputs& open = prepared.active.inputs;
  if (waiting.forecast) {
    prepared.active.job.forecast_bytes = bytes_expected(*request, *waiting.forecast);
    prepared.active.job.forecast_seconds = waiting.forecast->seconds;
    prepared.waiting.needs = needs_of(*request, *waiting.forecast, parts_.share);
    if (!prepared.waiting.needs) {
      fail(prepared.active.job,
           {507, "memory-limit",
            fmt::format("it needs {} of memory, and all jobs together may use {}",
                        size_needed(waiting.forecast->bytes_count), size_allowed(parts_.share.memory_bytes)),
            "", "start the service with a larger --memory-cap, on a larger machine"},
           false);
      return std::nullopt;
    }
    prepared.waiting.needs_forecast = false;
  } else if (request->command == "forecast") {
    prepared.waiting.needs = needs_of_forecast(open.bytes(), open.all_plain(), parts_.share);
  } else if (const auto small = needs_of_small(*request, open.bytes(), open.all_plain(), parts_.share)) {
    prepared.waiting.needs = small;
  } else {
    prepared.waiting.needs = needs_of_forecast(open.bytes(), open.all_plain(), parts_.share);
    prepared.waiting.needs_forecast = true;
  }
  if (const Offset least = waiting.least_bytes; least > prepared.waiting.needs->memory_bytes) {
    prepared.waiting.needs->memory_bytes = std::min(least, parts_.share.memory_bytes);
  }
  prepared.active.needs = *prepared.waiting.needs;
  // What a request limits itself is not raised.
  prepared.active.most_bytes = !prepared.waiting.needs_forecast && has_option(*request, "memory_cap")
                                   ? prepared.active.needs.memory_bytes
                                   : parts_.share.memory_bytes;
  return prepared;
}

void JobRunner::start_some() {
  std::vector<Prepared> ready;
  std::size_t looked_at = 0;
  for (auto place = waiting_.begin(); place != waiting_.end() && looked_at < kLookAhead;) {
    const int slots = 2 * parts_.share.processors;
    if (threads_in_use_ >= slots) break;
    if (place->needs && !fits(*place->needs)) {
      if (!place->passed_over) place->passed_over = Clock::now();
      if (Clock::now() - *place->passed_over > kPatience) break;
      ++place;
      ++looked_at;
      continue;
    }
    auto prepared = prepare(*place);
    if (!prepared) {
      place = waiting_.erase(place);
      continue;
    }
    *place = prepared->waiting;
    if (!active_.empty() || !ready.empty()) {
      if (memory_in_use_ + prepared->active.needs.memory_bytes > parts_.share.memory_bytes ||
          threads_in_use_ + prepared->active.needs.threads > slots) {
        if (!place->passed_over) place->passed_over = Clock::now();
        ++place;
        ++looked_at;
        continue;
      }
    }
    memory_in_use_ += prepared->active.needs.memory_bytes;
    threads_in_use_ += prepared->active.needs.threads;
    place = waiting_.erase(place);
    ready.push_back(std::move(*prepared));
  }
  if (!ready.empty()) start(std::move(ready));
}

/// Begins them in the journal, all in one transaction, and then starts them.
void JobRunner::start(std::vector<Prepared> jobs) {
  std::vector<bool> begun(jobs.size(), false);
  for (Prepared& prepared : jobs) {
    prepared.active.job.started_ms = now_ms();
    prepared.active.job.memory_bytes = prepared.active.needs.memory_bytes;
    prepared.active.forecasting = prepared.waiting.needs_forecast;
    prepared.active.waiting = prepared.waiting;
  }
  const Status written = parts_.journal.write([&](JobTable& table) {
    for (std::size_t k = 0; k < jobs.size(); ++k) {
      begun[k] = jobs[k].active.forecasting || table.begin(jobs[k].active.job);
    }
  });
  for (std::size_t k = 0; k < jobs.size(); ++k) {
    Prepared& prepared = jobs[k];
    Active& active = prepared.active;
    Status status = written;
    if (status.ok() && begun[k]) status = launch(prepared);
    if (status.ok() && begun[k]) {
      if (!active.forecasting) {
        active.job.state = JobState::kRunning;
        ++active.job.attempts;
        parts_.feed.publish("job", active.job.id, job_to_json(active.job, {}, false).dump());
      }
      log_start(active);
      const std::lock_guard lock(mutex_);
      ++(active.forecasting ? figures_.forecasts : figures_.started);
      active_.push_back(std::move(active));
      continue;
    }
    memory_in_use_ -= active.needs.memory_bytes;
    threads_in_use_ -= active.needs.threads;
    if (!written.ok()) {
      waiting_.push_front(prepared.waiting);  // the store does not take it: once more in a while
    } else if (begun[k]) {
      fail(active.job, {507, status.code(), status.message(), status.place(), status.remedy()},
           !active.forecasting);
    }
  }
  if (!written.ok()) throw std::runtime_error(written.message());
}

void JobRunner::log_start(const Active& active) const {
  parts_.log({active.forecasting ? "forecast-started" : "job-started",
              fmt::format("{} started, process {}, attempt {}, {}, {} threads, {} s of processor time",
                          active.forecasting ? "forecast" : active.job.command, active.child->pid(),
                          active.job.attempts, size_allowed(active.needs.memory_bytes), active.needs.threads,
                          active.needs.cpu_seconds),
              active.job.id});
}

Status JobRunner::launch(Prepared& prepared) {
  namespace fs = std::filesystem;
  const Active& active = prepared.active;
  const std::string folder = folder_of(active.job);
  std::error_code failure;
  fs::remove_all(folder, failure);  // of an attempt that was interrupted
  fs::create_directories(folder + "/in", failure);
  if (failure) {
    return Status::resource_limit("store", "the folder of a job cannot be made: " + failure.message(), folder,
                                  "look after the disk that holds the store");
  }
  std::vector<std::optional<std::string>> names(prepared.request.inputs.size());
  const Status read = parts_.journal.read([&](JobTable& table) {
    for (std::size_t k = 0; k < names.size(); ++k) {
      const auto digest = digest_in(prepared.request.inputs[k].path);
      const auto input = digest ? table.find_input(*digest) : std::nullopt;
      if (input) names[k] = input->name;
    }
  });
  if (!read.ok()) return read;
  if (Status status = active.inputs.link_into(folder + "/in", prepared.request, names); !status.ok())
    return status;

  ChildPlan plan;
  plan.program = parts_.program;
  plan.working_folder = folder + "/in";
  plan.memory_bytes = active.needs.memory_bytes;
  plan.cpu_seconds = active.needs.cpu_seconds;
  plan.threads = active.needs.threads;
  plan.niceness = kNiceness;
  if (active.forecasting) {
    plan.arguments = arguments_of(forecast_without_options(prepared.request, parts_.rules));
    plan.arguments.push_back(std::string("--json=../") + kForecastFile);
    plan.log = folder + "/forecast.txt";
  } else {
    plan.arguments = arguments_of(prepared.request);
    for (std::string& argument : output_arguments(prepared.request))
      plan.arguments.push_back(std::move(argument));
    plan.log = folder + "/text.txt";
  }
  plan.arguments.push_back("--analysis-store=" + parts_.inputs.analysis_folder());
  if (active.forecasting || !has_option(prepared.request, "threads")) {
    plan.arguments.push_back(fmt::format("--threads={}", plan.threads));
  }
  if (active.forecasting || !has_option(prepared.request, "memory_cap")) {
    plan.arguments.push_back(fmt::format("--memory-cap={}", active.needs.memory_bytes));
  }
  auto child = ChildProcess::start(plan);
  if (!child.ok()) return child.status();
  prepared.active.child.emplace(std::move(*child));
  return {};
}

void JobRunner::wait_and_look() {
  std::vector<pollfd> entries{{wake_, POLLIN, 0}};
  for (const Active& active : active_) {
    entries.push_back({active.child->end_handle(), POLLIN, 0});
    if (active.child->progress_handle() >= 0) entries.push_back({active.child->progress_handle(), POLLIN, 0});
  }
  bool watching = !waiting_.empty();
  for (const Active& active : active_) watching = watching || active.kill_at;
  {
    const std::lock_guard lock(mutex_);
    if (!arrived_.empty() || !cancelled_.empty()) return;
    watching = watching || stopping_;
  }
  ::poll(entries.data(), entries.size(), watching ? 200 : 60'000);
  std::uint64_t count = 0;
  [[maybe_unused]] const ssize_t got = ::read(wake_, &count, sizeof count);

  std::vector<Active> still;
  std::vector<Active> now = std::move(active_);
  active_.clear();
  std::vector<std::pair<Active, ChildEnd>> over;
  for (Active& active : now) {
    look_after(active);
    if (auto end = active.child->poll()) {
      over.emplace_back(std::move(active), *end);
    } else {
      still.push_back(std::move(active));
    }
  }
  active_ = std::move(still);
  for (auto& [active, end] : over) {
    memory_in_use_ -= active.needs.memory_bytes;
    threads_in_use_ -= active.needs.threads;
    active.child.reset();
    if (active.forecasting) {
      forecast_ended(std::move(active), end);
    } else {
      ended(std::move(active), end);
    }
  }
}

void JobRunner::look_after(Active& active) {
  for (const ChildProgress& progress : active.child->progress()) {
    if (!active.forecasting) tell_progress(active, progress);
  }
  if (active.kill_at && Clock::now() > *active.kill_at) active.child->kill();
}

void JobRunner::tell_progress(Active& active, const ChildProgress& progress) {
  const JobProgress shown{progress.phase, progress.done, progress.total};
  {
    const std::lock_guard lock(mutex_);
    progress_[active.job.number] = shown;
  }
  if (Clock::now() - active.told < kTellEvery) return;
  active.told = Clock::now();
  parts_.feed.publish("job", active.job.id, job_to_json(active.job, shown, false).dump());
}

}  // namespace stanchion::service
