#include "jobs/batch.hpp"

#include <fmt/format.h>
#include <poll.h>
#include <signal.h>
#include <unistd.h>

#include <algorithm>
#include <deque>
#include <filesystem>
#include <list>
#include <nlohmann/json.hpp>
#include <set>

#include "base/clock.hpp"
#include "jobs/analysis_store.hpp"
#include "jobs/digest_lanes.hpp"
#include "jobs/durable_file.hpp"
#include "jobs/memory_need.hpp"
#include "jobs/next_attempt.hpp"
#include "model/byte_size.hpp"
#include "model/exit_code.hpp"

namespace stanchion {
namespace {

constexpr int kMostPasses = 16;  // so often may smaller jobs go before one that waits for memory
constexpr std::size_t kLookAhead = 64;
constexpr std::size_t kReadAhead = 1024;  // of so many jobs digests are asked for at a time
constexpr int kWaitMilliseconds = 1000;   // an interruption ends the wait at once
constexpr double kTrimSeconds = 10;       // so often the analysis store is looked after

/// One job that is not recorded yet.
struct Waiting {
  const ListedJob* job = nullptr;
  bool asked = false;  ///< its digest is being worked out
  std::optional<std::string> digest;
  std::string model;           ///< digest of what the forecast depends on
  std::optional<Offset> need;  ///< absent: a forecast has to say it
  int attempts = 0, lost = 0, passed_by = 0;
  double seconds = 0, cpu_seconds = 0;
};

struct Running {
  Waiting waiting;
  ChildProcess child;
  bool forecasts = false;  ///< the child asks only what the job will need
  Offset need = 0;
  int threads = 1;
  std::string answer;
  double done = 0;
  Stopwatch watch;
};

std::optional<std::string> option_of(const JobRequest& request, const std::string& key) {
  for (const JobOption& option : request.options) {
    if (option.key == key) return option.value;
  }
  return std::nullopt;
}

/// A result that can be recorded once it is certain that the inputs are what they were.
struct Unconfirmed {
  const ListedJob* job = nullptr;
  JobResult result;  ///< with the digest that the inputs had
  std::string outcome;
};

class Batch {
 public:
  Batch(const RequestRules& rules, const BatchOptions& options, const BatchContext& context,
        FileDigests& files, ResultFile& results, std::vector<JobResult>& recorded)
      : rules_(rules),
        options_(options),
        context_(context),
        files_(files),
        results_(results),
        recorded_(recorded),
        lanes_(files, rules) {}

  Status run(const std::vector<const ListedJob*>& jobs) {
    for (const ListedJob* job : jobs) queue_.push_back({job, false, {}, {}, {}, 0, 0, 0, 0, 0});
    jobs_ = jobs.size();
    while (!queue_.empty() || !running_.empty() || !unconfirmed_.empty()) {
      if (context_.cancel != nullptr && context_.cancel->cancelled()) return stop();
      if (Status status = start_what_fits(); !status.ok()) return status;
      tell();
      if (running_.empty() && asked_ == 0) continue;
      wait_for_news();
      if (Status status = take_digests(); !status.ok()) return status;
      if (Status status = collect(); !status.ok()) return status;
      if (trimmed_.seconds() > kTrimSeconds) {
        trim_orders(options_.analysis_store, options_.store_bytes);
        trimmed_.restart();
      }
    }
    tell();
    return {};
  }

 private:
  void ask_for(Waiting& waiting) {
    if (std::exchange(waiting.asked, true)) return;
    lanes_.ask(waiting.job);
    ++asked_;
  }

  /// Of jobs that wait, and of those that only wait to be recorded.
  Status take_digests() {
    for (const JobDigests& found : lanes_.answers()) {
      --asked_;
      const auto is_it = [&found](const auto& entry) { return entry.job == found.job; };
      const auto ended = std::find_if(unconfirmed_.begin(), unconfirmed_.end(), is_it);
      Status status;
      if (ended != unconfirmed_.end()) {
        status = confirm(*ended, found.digest);
        unconfirmed_.erase(ended);
      } else if (auto waiting = std::find_if(queue_.begin(), queue_.end(), is_it); waiting != queue_.end()) {
        if (found.digest.ok()) {
          prepare(*waiting, found);
        } else {
          status = record_unreadable(*waiting, found.digest.status());
          queue_.erase(waiting);
        }
      }
      if (!status.ok()) return status;
    }
    return {};
  }

  Status record_unreadable(const Waiting& waiting, const Status& failure) {
    JobResult result = result_of(waiting);
    result.exit_code = exit_code(failure.kind());
    result.reason = failure.message();
    result.failure =
        ChildFailure{"bad_input", failure.code(), failure.message(), failure.place(), failure.remedy()};
    return record(result, "");
  }

  void prepare(Waiting& waiting, const JobDigests& found) {
    waiting.asked = false;
    waiting.digest = *found.digest;
    waiting.model = found.model;
    if (waiting.need) return;
    const JobRequest& request = waiting.job->request;
    const Offset bytes = input_bytes(request);
    const auto known = need_of_model_.find(waiting.model);
    if (known != need_of_model_.end()) {
      waiting.need = known->second;
    } else if (bytes <= kSmallInputBytes || request.command == "forecast") {
      waiting.need = need_from_size(bytes);
    }
  }

  Status start_what_fits() {
    std::size_t looked_at = 0, reading = 0;
    for (auto waiting = queue_.begin(); waiting != queue_.end() && looked_at < kLookAhead;) {
      if (!waiting->digest || waiting->asked) {
        if (++reading > kReadAhead) return {};
        ask_for(*waiting);
        ++waiting;
        continue;
      }
      ++looked_at;
      const bool forecasts = !waiting->need;
      // One forecast a model: its other jobs wait for it.
      if (forecasts && forecasting_.count(waiting->model) != 0) {
        ++waiting;
        continue;
      }
      if (!fits(*waiting)) {
        if (++waiting->passed_by > kMostPasses) return {};  // nothing may go before it any more
        ++waiting;
        continue;
      }
      if (!is_as_digested(*waiting)) {
        ask_for(*waiting);
        ++waiting;
        continue;
      }
      if (Status status = start(*waiting, forecasts); !status.ok()) return status;
      waiting = queue_.erase(waiting);
    }
    return {};
  }

  /// Whether its inputs are those of its digest. One that has changed since may have been read meanwhile for
  /// another job, so that its present content is known and is another.
  bool is_as_digested(const Waiting& waiting) {
    const JobRequest& request = waiting.job->request;
    if (!digest_is_known(request, files_)) return false;
    const auto present = digest_of(request, files_);
    return present.ok() && *present == waiting.digest;
  }

  Offset need_of(const Waiting& waiting) const {
    const Offset need = waiting.need.value_or(need_from_size(input_bytes(waiting.job->request)));
    return std::min(need, options_.memory_cap);
  }

  bool fits(const Waiting& waiting) const {
    if (running_.empty()) return true;
    return threads_in_use_ < options_.processors && memory_in_use_ + need_of(waiting) <= options_.memory_cap;
  }

  /// As many as were asked for, or a fair share of the processors among those that can run side by side.
  int threads_of(const Waiting& waiting) const {
    const auto asked = option_of(waiting.job->request, "threads");
    const int free = std::max(1, options_.processors - threads_in_use_);
    if (asked) return std::max(1, std::atoi(asked->c_str()));
    const Offset side_by_side =
        std::max<Offset>(1, options_.memory_cap / std::max<Offset>(1, need_of(waiting)));
    const auto sharing = std::min<Offset>(side_by_side, static_cast<Offset>(queue_.size() + running_.size()));
    const auto share =
        options_.processors / static_cast<int>(std::clamp<Offset>(sharing, 1, options_.processors));
    return std::clamp(share, 1, free);
  }

  ChildPlan plan_of(const Waiting& waiting, bool forecasts, const Running& run) const {
    const JobRequest& request = waiting.job->request;
    ChildPlan plan;
    plan.program = options_.program;
    plan.arguments = arguments_of(forecasts ? forecast_request(request, rules_) : request);
    const auto add = [&plan](std::string option, const std::string& value) {
      plan.arguments.push_back(std::move(option) + "=" + value);
    };
    add("--json", run.answer);
    plan.arguments.push_back("--quiet");
    add("--analysis-store", options_.analysis_store);
    if (!option_of(request, "memory_cap")) add("--memory-cap", fmt::format("{}", options_.memory_cap));
    if (!option_of(request, "threads")) add("--threads", fmt::format("{}", run.threads));
    if (!forecasts && !options_.reports.empty()) add("--html", options_.reports + "/" + request.id + ".html");
    const bool certified = request.command == "count" || (request.command == "check" && !has_steps(request));
    if (!forecasts && !options_.certificates.empty() && certified) {
      add("--certificate", options_.certificates + "/" + request.id + ".json");
    }
    plan.log = options_.logs.empty() ? "" : options_.logs + "/" + request.id + ".log";
    plan.memory_bytes = run.need;
    plan.cpu_seconds = options_.cpu_seconds;
    plan.threads = run.threads;
    return plan;
  }

  static bool has_steps(const JobRequest& request) {
    return std::any_of(request.inputs.begin(), request.inputs.end(),
                       [](const JobInput& input) { return input.key == "steps"; });
  }

  Status start(Waiting& waiting, bool forecasts) {
    Running run{waiting, {}, forecasts, need_of(waiting), threads_of(waiting), {}, 0, {}};
    run.answer = fmt::format("{}/answer-{}-{}.json", options_.work_folder, ::getpid(), ++started_);
    if (!forecasts) ++run.waiting.attempts;
    auto child = ChildProcess::start(plan_of(waiting, forecasts, run));
    if (!child.ok()) return child.status();
    run.child = std::move(*child);
    log(waiting, fmt::format("{} started, process {}, {} threads, {} bytes", forecasts ? "forecast" : "job",
                             run.child.pid(), run.threads, run.need));
    if (forecasts) forecasting_.insert(waiting.model);
    memory_in_use_ += run.need;
    threads_in_use_ += run.threads;
    running_.push_back(std::move(run));
    return {};
  }

  void wait_for_news() {
    std::vector<pollfd> handles{{lanes_.handle(), POLLIN, 0}};
    for (const Running& run : running_) {
      handles.push_back({run.child.end_handle(), POLLIN, 0});
      if (run.child.progress_handle() >= 0) handles.push_back({run.child.progress_handle(), POLLIN, 0});
    }
    ::poll(handles.data(), handles.size(), kWaitMilliseconds);
  }

  Status collect() {
    for (auto run = running_.begin(); run != running_.end();) {
      for (const ChildProgress& line : run->child.progress()) run->done = line.done;
      const auto end = run->child.poll();
      if (!end) {
        ++run;
        continue;
      }
      memory_in_use_ -= run->need;
      threads_in_use_ -= run->threads;
      Running ended = std::move(*run);
      run = running_.erase(run);
      const Status status = ended.forecasts ? take_forecast(ended, *end) : take_answer(ended, *end);
      ::unlink(ended.answer.c_str());
      if (!status.ok()) return status;
    }
    return {};
  }

  /// Whatever comes of a forecast, the job itself is run next: it says best what is wrong with it.
  Status take_forecast(Running& ended, const ChildEnd& end) {
    forecasting_.erase(ended.waiting.model);
    const auto need = need_from_forecast(read_whole(ended.answer).value_or(""), ended.waiting.job->request);
    log(ended.waiting, need ? fmt::format("forecast: {} bytes", *need) : "no forecast: " + end.reason);
    // Without a forecast the job gets all the memory, and thus runs alone.
    const Offset known = need.value_or(options_.memory_cap);
    if (need) need_of_model_[ended.waiting.model] = known;
    ended.waiting.need = known;
    for (Waiting& waiting : queue_) {
      if (need && waiting.model == ended.waiting.model && !waiting.need) waiting.need = known;
    }
    queue_.push_front(std::move(ended.waiting));
    return {};
  }

  Status take_answer(Running& ended, const ChildEnd& end) {
    Waiting& waiting = ended.waiting;
    waiting.seconds += ended.watch.seconds();
    waiting.cpu_seconds += end.cpu_seconds;
    if (const auto memory =
            memory_of_next_attempt(end, {waiting.attempts, waiting.lost}, ended.need, options_.memory_cap)) {
      waiting.need = memory;
      if (end.kind == ChildEndKind::kKilled) ++waiting.lost;
      log(waiting, fmt::format("{}; once more with {} bytes", end.reason, *memory));
      queue_.push_front(std::move(waiting));
      return {};
    }
    JobResult result = result_of(waiting);
    result.exit_code = end.exit_code == kExitInterrupted ? kExitResource : end.exit_code;
    result.reason = end.reason;
    result.failure = end.failure;
    result.peak_bytes = end.peak_bytes;
    std::string outcome = read_whole(ended.answer).value_or("");
    check_answer(end, outcome, result);
    Unconfirmed answer{waiting.job, std::move(result), std::move(outcome)};
    if (digest_is_known(waiting.job->request, files_)) {
      return confirm(answer, digest_of(waiting.job->request, files_));
    }
    unconfirmed_.push_back(std::move(answer));
    lanes_.ask(waiting.job);
    ++asked_;
    return {};
  }

  static void fail(JobResult& result, int code, const std::string& reason) {
    result.exit_code = code;
    result.reason = reason;
    result.failure.reset();
  }

  /// An answer has to be there.
  static void check_answer(const ChildEnd& end, std::string& outcome, JobResult& result) {
    const bool answered = end.kind == ChildEndKind::kExited && end.exit_code != kExitUsage &&
                          end.exit_code != kExitResource && end.exit_code != kExitInternal;
    if (nlohmann::json::accept(outcome)) return;
    outcome.clear();
    if (answered) fail(result, kExitInternal, "the child ended well but left no answer");
  }

  /// Records it, unless its inputs have changed since their digest was taken.
  Status confirm(Unconfirmed& answer, const Result<std::string>& digest) {
    if (!digest.ok() || digest.value() != answer.result.digest) {
      answer.outcome.clear();
      fail(answer.result, kExitUsage, "an input changed while the job ran");
      answer.result.digest.reset();
    }
    return record(answer.result, answer.outcome);
  }

  JobResult result_of(const Waiting& waiting) const {
    JobResult result;
    result.id = waiting.job->request.id;
    result.command = waiting.job->request.command;
    result.digest = waiting.digest;
    result.attempts = std::max(1, waiting.attempts);
    result.seconds = waiting.seconds;
    result.cpu_seconds = waiting.cpu_seconds;
    result.finished = utc_now();
    return result;
  }

  Status record(const JobResult& result, const std::string& outcome) {
    if (Status status = results_.append(result_line(result, outcome)); !status.ok()) return status;
    recorded_.push_back(result);
    ++done_;
    if (context_.log) {
      context_.log(result.id, fmt::format("recorded, exit code {}{}{}", result.exit_code,
                                          result.reason.empty() ? "" : ": ", result.reason));
    }
    return {};
  }

  /// Records what has finished meanwhile; the rest is stopped.
  Status stop() {
    if (Status status = collect(); !status.ok()) return status;
    for (Running& run : running_) run.child.stop();
    for (Running& run : running_) {
      const ChildEnd end = run.child.wait();
      if (!run.forecasts && end.kind == ChildEndKind::kExited) {
        if (Status status = take_answer(run, end); !status.ok()) return status;
      }
      ::unlink(run.answer.c_str());
    }
    running_.clear();
    unconfirmed_.clear();
    return Status::interrupted();
  }

  void tell() const {
    if (!context_.progress) return;
    double parts = static_cast<double>(done_);
    for (const Running& run : running_) parts += run.forecasts ? 0 : 0.9 * run.done;
    context_.progress(
        {jobs_, done_, running_.size(), parts / static_cast<double>(std::max<std::size_t>(1, jobs_))});
  }

  void log(const Waiting& waiting, const std::string& text) const {
    if (context_.log) context_.log(waiting.job->request.id, text);
  }

  const RequestRules& rules_;
  const BatchOptions& options_;
  const BatchContext& context_;
  FileDigests& files_;
  ResultFile& results_;
  std::vector<JobResult>& recorded_;
  std::deque<Waiting> queue_;
  std::list<Running> running_;
  std::list<Unconfirmed> unconfirmed_;
  std::map<std::string, Offset> need_of_model_;
  std::set<std::string> forecasting_;
  Stopwatch trimmed_;
  Offset memory_in_use_ = 0;
  int threads_in_use_ = 0;
  std::size_t jobs_ = 0, done_ = 0, asked_ = 0;
  std::uint64_t started_ = 0;
  DigestLanes lanes_;
};

/// Makes the folders; what an earlier run left half-done in the work folder goes.
Status make_folders(const BatchOptions& options) {
  std::error_code failure;
  for (const std::string& folder :
       {options.work_folder, options.analysis_store, options.reports, options.certificates, options.logs}) {
    if (folder.empty()) continue;
    std::filesystem::create_directories(folder, failure);
    if (failure || !std::filesystem::is_directory(folder, failure)) {
      return Status::bad_usage("cannot-write", "the folder cannot be made: " + failure.message(), folder,
                               "name a folder where you may write");
    }
  }
  for (const auto& entry : std::filesystem::directory_iterator(options.work_folder, failure)) {
    if (entry.path().filename().string().rfind("answer-", 0) == 0)
      std::filesystem::remove(entry.path(), failure);
  }
  return {};
}

}  // namespace

Status run_batch(const std::vector<const ListedJob*>& jobs, const RequestRules& rules,
                 const BatchOptions& given, const BatchContext& context, FileDigests& files,
                 ResultFile& results, std::vector<JobResult>& recorded) {
  BatchOptions options = given;
  if (options.analysis_store.empty()) options.analysis_store = options.work_folder + "/analyses";
  if (Status status = make_folders(options); !status.ok()) return status;
  drop_abandoned_orders(options.analysis_store);
  Batch batch(rules, options, context, files, results, recorded);
  Status status = batch.run(jobs);
  trim_orders(options.analysis_store, options.store_bytes);
  std::error_code failure;
  if (status.ok()) std::filesystem::remove_all(options.work_folder, failure);
  return status;
}

}  // namespace stanchion
