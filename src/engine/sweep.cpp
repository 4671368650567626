#include <algorithm>
#include <cmath>
#include <cstdio>

#include "base/clock.hpp"
#include "base/fault_words.hpp"
#include "engine/other_side.hpp"
#include "engine/side_by_side.hpp"
#include "model/shift_grid.hpp"

namespace stanchion {
namespace {

constexpr int kMostRounds = 64;
/// Stretches narrower than this part of the range are not split: what lies in them is one cluster to double
/// precision.
constexpr double kNarrowest = 0x1p-44;

class Sweep {
 public:
  Sweep(PencilCounter& counter, CountRunner& runner, const Request& request, Outcome& outcome)
      : counter_(counter), runner_(runner), sweep_(request.sweep), outcome_(outcome) {}

  Status run() {
    const double floor = kNarrowest * (sweep_.to - sweep_.from);
    std::vector<double> shifts = shift_grid(sweep_);
    for (int round = 0; !shifts.empty() && round < kMostRounds; ++round) {
      auto counts = runner_.run(shifts);
      if (!counts.ok()) return counts.status();
      for (ShiftCount& count : *counts) take(std::move(count));
      shifts = sweep_.refine ? next_shifts(floor) : std::vector<double>{};
    }
    std::sort(counts_.begin(), counts_.end(),
              [](const ShiftCount& a, const ShiftCount& b) { return a.shift < b.shift; });
    SweepOutcome& answer = outcome_.sweep.emplace();
    answer.jumps = counter_.kind() == CountKind::kDirections ? changes() : staircase_.jumps();
    answer.contradictions = staircase_.contradictions();
    answer.side_by_side = runner_.lanes();
    answer.resumed = runner_.resumed();
    for (const Contradiction& pair : answer.contradictions) report(pair);
    outcome_.count->counts = std::move(counts_);
    return {};
  }

 private:
  void take(ShiftCount count) {
    if (const auto fact = counter_.fact(count)) staircase_.add(*fact);
    counts_.push_back(std::move(count));
  }

  std::vector<double> next_shifts(double floor) {
    if (!staircase_.contradictions().empty()) return {};
    if (counter_.kind() != CountKind::kDirections) return staircase_.splits(sweep_.width, floor);
    std::sort(counts_.begin(), counts_.end(),
              [](const ShiftCount& a, const ShiftCount& b) { return a.shift < b.shift; });
    std::vector<double> middles;
    for (const Jump& jump : changes()) {
      const double span = jump.high - jump.low, size = std::max(std::fabs(jump.low), std::fabs(jump.high));
      if (std::abs(jump.count) > 1 && span > sweep_.width * size && span > floor)
        middles.push_back(middle_shift(jump.low, jump.high));
    }
    return middles;
  }

  /// Where the inertia changes: K is not definite, so it may fall as well as rise.
  std::vector<Jump> changes() const {
    std::vector<Jump> jumps;
    const ShiftCount* before = nullptr;
    for (const ShiftCount& count : counts_) {
      if (!count.below) continue;
      if (before != nullptr && *count.below != *before->below) {
        jumps.push_back({before->shift, count.shift, *count.below - *before->below});
      }
      before = &count;
    }
    return jumps;
  }

  void report(const Contradiction& pair) {
    char text[512];
    std::snprintf(
        text, sizeof(text),
        "the certified counts at %.10g and %.10g contradict each other: at least %d values by the "
        "one, at most %d "
        "by the other. One of the two certificates is wrong: %s. Both certificates are in the JSON document",
        pair.shift, pair.other_shift, pair.least, pair.most, kMachineOrProgram);
    counter_.warn("counts-contradict", text);
  }

  PencilCounter& counter_;
  CountRunner& runner_;
  const SweepRequest& sweep_;
  Outcome& outcome_;
  Staircase staircase_;
  std::vector<ShiftCount> counts_;
};

Result<Outcome> sweep_model(ModelInput model, const Request& request, const RunContext& context,
                            ThreadPool& pool, Outcome outcome) {
  outcome.count.emplace();
  PencilCounter counter(request, context, pool, outcome);
  if (Status status = counter.prepare(std::move(model)); !status.ok()) return status;
  if (Status status = counter.judge(); !status.ok()) return status;
  outcome.count->sentences = counter.reservations();
  CountRunner runner(counter, context, pool, outcome);
  if (Status status = runner.open(); !status.ok()) return status;
  if (Status status = Sweep(counter, runner, request, outcome).run(); !status.ok()) return status;
  if (request.pencil == Pencil::kGeometric && counter.two_sided()) {
    std::vector<std::string>& sentences = outcome.count->sentences;
    auto other = look_at_the_other_side(counter, request.sweep.from, request.sweep.to, outcome, sentences);
    if (!other.ok()) return other.status();
    if (auto convex = convexity_sentence(outcome.count->counts, counter.constrained()))
      sentences.push_back(std::move(*convex));
  }
  return outcome;
}

}  // namespace

Result<Outcome> run_sweep(const Request& request, const RunContext& context) {
  const Stopwatch watch;
  ThreadPool pool(threads_of(request));
  Outcome outcome = begin_outcome("sweep", request, Question::kSweep);
  auto model = read_model(request, context, pool, outcome);
  if (!model.ok()) return model.status();
  auto result = sweep_model(std::move(*model), request, context, pool, std::move(outcome));
  if (result.ok()) finish_outcome(*result, watch.seconds());
  return result;
}

}  // namespace stanchion
