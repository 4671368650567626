#include "jobs/digest_lanes.hpp"

#include <signal.h>
#include <sys/eventfd.h>

#include <exception>
#include <utility>

#include "jobs/memory_need.hpp"

namespace stanchion {
namespace {

constexpr Offset kLargeBytes = Offset{64} << 20;  // a tenth of a second, or a second from a slow disk

}  // namespace

DigestLanes::DigestLanes(FileDigests& files, const RequestRules& rules)
    : files_(files), rules_(rules), wake_(::eventfd(0, EFD_CLOEXEC | EFD_NONBLOCK)) {
  // A signal is for the thread that waits for news: it ends that wait.
  sigset_t all, before;
  sigfillset(&all);
  ::pthread_sigmask(SIG_SETMASK, &all, &before);
  for (Lane& lane : lanes_) lane.thread = std::thread([this, &lane] { work(lane); });
  ::pthread_sigmask(SIG_SETMASK, &before, nullptr);
}

DigestLanes::~DigestLanes() {
  {
    const std::lock_guard lock(mutex_);
    stop_.cancel();
  }
  changed_.notify_all();
  for (Lane& lane : lanes_) lane.thread.join();
}

void DigestLanes::ask(const ListedJob* job) {
  const bool large = input_bytes(job->request) > kLargeBytes;
  {
    const std::lock_guard lock(mutex_);
    lanes_[large ? 1 : 0].jobs.push_back(job);
  }
  changed_.notify_all();
}

std::vector<JobDigests> DigestLanes::answers() {
  const std::lock_guard lock(mutex_);
  std::uint64_t count = 0;
  [[maybe_unused]] const ssize_t got = ::read(wake_.get(), &count, sizeof count);
  return std::exchange(answers_, {});
}

JobDigests DigestLanes::digests_of(const ListedJob* job) {
  JobDigests found;
  found.job = job;
  try {
    const JobRequest& request = job->request;
    found.digest = digest_of(request, files_, &stop_);
    if (!found.digest.ok()) return found;
    const auto model = digest_of(forecast_request(request, rules_), files_, &stop_);
    constexpr const char* kKindMark[] = {"", "l", "b"};
    found.model = model.ok() ? *model + kKindMark[static_cast<int>(memory_kind(request))] : *found.digest;
  } catch (const std::exception& error) {
    found.digest = Status::resource_limit("out-of-memory", error.what(), job->request.id,
                                          "run fewer programs beside this one");
  }
  return found;
}

void DigestLanes::work(Lane& lane) {
  std::unique_lock lock(mutex_);
  while (true) {
    changed_.wait(lock, [&] { return stop_.cancelled() || !lane.jobs.empty(); });
    if (stop_.cancelled()) return;
    const ListedJob* job = lane.jobs.front();
    lane.jobs.pop_front();
    lock.unlock();
    JobDigests found = digests_of(job);
    lock.lock();
    answers_.push_back(std::move(found));
    const std::uint64_t one = 1;
    [[maybe_unused]] const ssize_t written = ::write(wake_.get(), &one, sizeof one);
  }
}

}  // namespace stanchion
