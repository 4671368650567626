// Counts at many shifts: side by side where memory allows, one at a time with all threads where it does not.
#pragma once

#include <vector>

#include "engine/pencil_counter.hpp"

namespace stanchion {

/// Runs batches of counts. The answers do not depend on how many run at a time: each count has a number, and
/// from that its random vectors and its share of the risk.
class CountRunner {
 public:
  /// As many lanes as the forecast of `counter`'s pencil allows, at most one a thread of the request. What an
  /// earlier run left is taken from `context`'s journal. All references outlive the runner.
  CountRunner(PencilCounter& counter, const RunContext& context, ThreadPool& pool, Outcome& outcome)
      : counter_(counter), context_(context), pool_(pool), outcome_(outcome) {}

  /// Reads the journal, if there is one. Call once, before the first batch.
  Status open();

  /// The counts at `shifts`, in this order; the numbers of the events go on from the batch before.
  Result<std::vector<ShiftCount>> run(const std::vector<double>& shifts);

  int lanes() const { return lanes_; }
  Index resumed() const { return resumed_; }

 private:
  struct Task;
  std::optional<JournalEntry> known(Index number, double shift) const;
  Status work_one(Task& task, int lanes, ThreadPool& pool);
  Status work_all(std::vector<Task>& tasks);
  Status record(const Task& task);

  PencilCounter& counter_;
  const RunContext& context_;
  ThreadPool& pool_;
  Outcome& outcome_;
  std::vector<JournalEntry> journal_;
  int lanes_ = 1;
  Index resumed_ = 0;
};

}  // namespace stanchion
