#include "service/job_finisher.hpp"

#include <fcntl.h>
#include <fmt/format.h>
#include <sys/stat.h>

#include <filesystem>

#include "service/job_files.hpp"
#include "service/job_view.hpp"

namespace stanchion::service {
namespace {

constexpr int kThreads = 4;
constexpr auto kPause = std::chrono::seconds(1);  // before a store that cannot be written is tried again

bool flush(const std::string& path, int flags) {
  const FileHandle handle(::open(path.c_str(), O_RDONLY | O_CLOEXEC | O_NOFOLLOW | flags));
  return handle && ::fsync(handle.get()) == 0;
}

/// The names of the files that are there, all of them safe on disk.
std::vector<std::string> keep_files(const std::string& folder) {
  std::vector<std::string> names;
  for (const JobFile& file : job_files()) {
    struct stat facts {};
    const std::string path = folder + "/" + file.file;
    if (::stat(path.c_str(), &facts) == 0 && flush(path, 0)) names.emplace_back(file.name);
  }
  flush(folder, O_DIRECTORY);
  return names;
}

}  // namespace

JobFinisher::JobFinisher(JobJournal& journal, InputStore& inputs, EventFeed& feed, LogSink log)
    : journal_(journal), inputs_(inputs), feed_(feed), log_(std::move(log)) {
  for (int k = 0; k < kThreads; ++k) threads_.emplace_back([this] { work(); });
}

JobFinisher::~JobFinisher() {
  {
    const std::lock_guard lock(mutex_);
    stopping_ = true;
  }
  changed_.notify_all();
  for (std::thread& thread : threads_) thread.join();
}

void JobFinisher::finish(FinishedRun run) {
  {
    const std::lock_guard lock(mutex_);
    runs_.push_back(std::move(run));
  }
  changed_.notify_one();
}

FinisherFigures JobFinisher::figures() const {
  const std::lock_guard lock(mutex_);
  return figures_;
}

/// False when the job was not there to be ended, or the service ends while the store cannot be written.
bool JobFinisher::write_end(const FinishedRun& run) {
  for (bool first = true;; first = false) {
    bool ended = false;
    const Status status = journal_.write([&](JobTable& table) {
      if (!run.has_begun && !table.begin(run.job)) return;
      ended = table.end(run.job);
    });
    if (status.ok()) return ended;
    if (first) {
      log_({"store-failed", "its end cannot be written yet: " + status.message(), run.job.id,
            LogLevel::kError});
    }
    std::unique_lock lock(mutex_);
    if (changed_.wait_for(lock, kPause, [this] { return stopping_; })) return false;
  }
}

void JobFinisher::finish_one(FinishedRun& run) {
  JobRecord& job = run.job;
  std::error_code failure;
  std::filesystem::remove_all(run.folder + "/in", failure);
  if (run.has_begun) {
    job.files = keep_files(run.folder);
    job.headline = headline_of(run.folder + "/result.json");
  }
  job.finished_ms = now_ms();
  if (!write_end(run)) return;
  if (!run.has_begun) ++job.attempts;
  log_({"job-ended",
        fmt::format("{}, {}", name_of(job.state),
                    job.problem ? job.problem->detail : fmt::format("exit code {}", *job.exit_code)),
        job.id, job.problem ? LogLevel::kWarning : LogLevel::kInfo});
  {
    const std::lock_guard lock(mutex_);
    if (job.state == JobState::kDone) ++figures_.done;
    if (job.state == JobState::kFailed) ++figures_.failed;
    if (job.state == JobState::kCancelled) ++figures_.cancelled;
    figures_.cpu_seconds += run.cpu_seconds;
  }
  feed_.publish("job", job.id, job_to_json(job, {}, false).dump());
}

void JobFinisher::work() {
  while (true) {
    FinishedRun run;
    {
      std::unique_lock lock(mutex_);
      changed_.wait(lock, [this] { return stopping_ || !runs_.empty(); });
      if (runs_.empty()) return;
      run = std::move(runs_.front());
      runs_.pop_front();
    }
    try {
      finish_one(run);
    } catch (const std::exception& error) {
      log_({"job-failed-to-end", error.what(), run.job.id, LogLevel::kError});
    }
  }
}

}  // namespace stanchion::service
