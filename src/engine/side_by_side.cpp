#include "engine/side_by_side.hpp"

#include <algorithm>
#include <atomic>
#include <exception>
#include <mutex>
#include <new>
#include <thread>

namespace stanchion {

/// One count to be made, and what came of it.
struct CountRunner::Task {
  Index number = 0;
  double shift = 0;
  bool from_journal = false;
  ShiftCount count;
  Outcome scratch;
};

Status CountRunner::open() {
  lanes_ = counter_.pencil().side_by_side(pool_.size(), counter_.pencil().free_bytes());
  if (context_.journal == nullptr) return {};
  auto entries = context_.journal->open(outcome_);
  if (!entries.ok()) return entries.status();
  journal_ = std::move(*entries);
  return {};
}

std::optional<JournalEntry> CountRunner::known(Index number, double shift) const {
  for (const JournalEntry& entry : journal_) {
    if (entry.number == number && entry.count.shift == shift) return entry;
  }
  return std::nullopt;
}

Status CountRunner::record(const Task& task) {
  if (context_.on_count) context_.on_count(task.count);
  if (context_.journal == nullptr || task.from_journal) return {};
  return context_.journal->record({task.number, task.count, task.scratch.events});
}

Status CountRunner::work_one(Task& task, int lanes, ThreadPool& pool) {
  try {
    auto count = counter_.count_apart(task.shift, task.number, lanes, pool, task.scratch);
    if (!count.ok()) return count.status();
    task.count = std::move(*count);
    return {};
  } catch (const std::bad_alloc&) {
    return Status::resource_limit("out-of-memory", "the system has no more memory for a count", "",
                                  "free memory, or set --memory-cap so that fewer counts run side by side");
  }
}

Status CountRunner::work_all(std::vector<Task>& tasks) {
  std::atomic<std::size_t> next{0};
  std::atomic<bool> stop{false};
  std::mutex mutex;
  Status status;
  std::size_t done = 0;
  const auto lane = [&](int lanes, ThreadPool& pool) {
    for (std::size_t k = next++; k < tasks.size() && !stop; k = next++) {
      Status one = tasks[k].from_journal ? Status{} : work_one(tasks[k], lanes, pool);
      const std::lock_guard lock(mutex);
      if (one.ok()) one = record(tasks[k]);
      if (!one.ok()) {
        stop = true;
        if (status.ok()) status = std::move(one);
      }
      if (context_.progress)
        context_.progress("count", static_cast<double>(++done) / static_cast<double>(tasks.size()));
    }
  };
  const int lanes = static_cast<int>(std::min<std::size_t>(static_cast<std::size_t>(lanes_), tasks.size()));
  if (lanes < 2) {
    lane(1, pool_);
    return status;
  }
  const int threads_each = std::max(1, pool_.size() / lanes);
  outcome_.memory.forecast =
      std::max(outcome_.memory.forecast, counter_.pencil().bytes_side_by_side(lanes, threads_each));
  std::vector<std::thread> threads;
  threads.reserve(static_cast<std::size_t>(lanes));
  const auto lane_of_its_own = [&] {
    try {
      ThreadPool own(threads_each);
      lane(lanes, own);
    } catch (const std::exception&) {  // std::bad_alloc, or no thread to be had
      const std::lock_guard lock(mutex);
      stop = true;
      if (status.ok()) {
        status = Status::resource_limit("out-of-memory",
                                        "the system has no memory or no thread for counts side by side", "",
                                        "use fewer --threads, or raise the limits");
      }
    }
  };
  for (int k = 0; k < lanes; ++k) {
    try {
      threads.emplace_back(lane_of_its_own);
    } catch (const std::exception&) {
      break;  // those that were started do it all
    }
  }
  for (std::thread& thread : threads) thread.join();
  if (threads.empty()) lane(1, pool_);
  return status;
}

Result<std::vector<ShiftCount>> CountRunner::run(const std::vector<double>& shifts) {
  const Index first = counter_.pencil().reserve_events(static_cast<Index>(shifts.size()));
  std::vector<Task> tasks(shifts.size());
  for (std::size_t k = 0; k < tasks.size(); ++k) {
    Task& task = tasks[k];
    task.number = first + static_cast<Index>(k);
    task.shift = shifts[k];
    if (auto entry = known(task.number, task.shift)) {
      task.from_journal = true;
      task.count = std::move(entry->count);
      for (const RiskEvent& event : entry->events) task.scratch.risk += event.charged;
      task.scratch.events = std::move(entry->events);
      ++resumed_;
    }
  }
  if (Status status = work_all(tasks); !status.ok()) return status;
  std::vector<ShiftCount> counts;
  for (Task& task : tasks) {
    counter_.merge(task.scratch);
    counts.push_back(std::move(task.count));
  }
  return counts;
}

}  // namespace stanchion
