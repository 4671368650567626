// Takes queued jobs in order and runs each as a child process of its own, as many as memory and processors
// allow.
#pragma once

#include <atomic>
#include <chrono>
#include <cstdint>
#include <deque>
#include <map>
#include <memory>
#include <mutex>
#include <optional>
#include <string>
#include <thread>
#include <vector>

#include "base/log_record.hpp"
#include "jobs/child_process.hpp"
#include "jobs/next_attempt.hpp"
#include "service/event_feed.hpp"
#include "service/input_store.hpp"
#include "service/job_files.hpp"
#include "service/job_finisher.hpp"
#include "service/job_journal.hpp"
#include "service/job_needs.hpp"
#include "service/job_view.hpp"
#include "service/roots.hpp"

namespace stanchion::service {

/// What the runner works with; outlives it.
struct RunnerParts {
  JobJournal& journal;
  InputStore& inputs;
  const Roots& roots;
  EventFeed& feed;
  JobFinisher& finisher;
  RequestRules rules;
  std::string jobs_folder;
  MachineShare share;
  std::string program = "/proc/self/exe";
  LogSink log;
};

struct RunnerFigures {
  std::uint64_t started = 0, forecasts = 0;
  std::int64_t waiting = 0, running = 0;
  Offset memory_bytes = 0;
};

class JobRunner {
 public:
  explicit JobRunner(RunnerParts parts);
  ~JobRunner();
  JobRunner(const JobRunner&) = delete;
  JobRunner& operator=(const JobRunner&) = delete;

  /// Thread safe, all of these.
  void enqueue(std::int64_t number);
  void cancel(std::int64_t number);
  std::optional<JobProgress> progress_of(std::int64_t number) const;
  RunnerFigures figures() const;

  /// Starts nothing more; what runs may go on for `grace`, then it is stopped and queued again.
  void stop(std::chrono::milliseconds grace);

 private:
  using Clock = std::chrono::steady_clock;

  struct Waiting {
    std::int64_t number = 0;
    std::optional<JobNeeds> needs;
    std::optional<JobForecast> forecast;
    bool needs_forecast = false;
    std::optional<Clock::time_point> passed_over;  ///< since when others were preferred
    Offset least_bytes = 0;    ///< an earlier attempt, or forecast, met its limit with less
    Attempts forecasts{0, 0};  ///< made and lost so far

    /// For another turn: what it needs is found anew, and its wait begins anew.
    Waiting once_more() const {
      Waiting again = *this;
      again.needs.reset();
      again.passed_over.reset();
      return again;
    }
  };

  struct Active {
    JobRecord job;
    JobNeeds needs;
    Offset most_bytes = 0;  ///< that another attempt may use
    Waiting waiting;        ///< as it was before it began
    OpenInputs inputs;
    std::optional<ChildProcess> child;
    bool forecasting = false, stop_asked = false;
    std::optional<Clock::time_point> kill_at;
    Clock::time_point told;
  };

  struct Prepared {
    Waiting waiting;
    Active active;
    JobRequest request;
  };

  void run();
  void take_commands();
  void start_some();
  std::optional<Prepared> prepare(Waiting waiting);
  bool fits(const JobNeeds& needs) const;
  void start(std::vector<Prepared> jobs);
  Status launch(Prepared& prepared);
  void log_start(const Active& active) const;
  void wait_and_look();
  void look_after(Active& active);
  void ended(Active active, const ChildEnd& end);
  bool try_again(const Active& active, const ChildEnd& end);
  void forecast_ended(Active active, const ChildEnd& end);
  void fail(JobRecord job, JobProblem problem, bool has_begun);
  void tell_progress(Active& active, const ChildProgress& progress);
  std::string folder_of(const JobRecord& job) const { return parts_.jobs_folder + "/" + job.id; }

  static constexpr const char* kForecastFile = "forecast.json";  ///< in a job's folder, while it is forecast

  RunnerParts parts_;
  int wake_ = -1;

  // Of the runner's own thread.
  std::deque<Waiting> waiting_;
  std::vector<Active> active_;
  Offset memory_in_use_ = 0;
  int threads_in_use_ = 0;

  mutable std::mutex mutex_;
  std::vector<std::int64_t> arrived_, cancelled_;
  std::map<std::int64_t, JobProgress> progress_;
  RunnerFigures figures_;
  bool stopping_ = false;
  Clock::time_point stop_at_;
  std::thread thread_;
};

}  // namespace stanchion::service
