#include <algorithm>
#include <cstdio>

#include "base/clock.hpp"
#include "base/fault_words.hpp"
#include "engine/other_side.hpp"
#include "engine/pencil_counter.hpp"

namespace stanchion {
namespace {

/// The number of values never falls as the shift grows, so certified counts that do are a fault.
Status never_falls(const PencilCounter& counter, const std::vector<ShiftCount>& counts) {
  Staircase staircase;
  for (const ShiftCount& count : counts) {
    if (const auto fact = counter.fact(count)) staircase.add(*fact);
  }
  if (staircase.contradictions().empty()) return {};
  return Status::internal(std::string("certified counts contradict each other: ") + kMachineOrProgram);
}

Result<Outcome> count_model(ModelInput model, const Request& request, const RunContext& context,
                            ThreadPool& pool, Outcome outcome) {
  outcome.count.emplace();
  PencilCounter counter(request, context, pool, outcome);
  if (Status status = counter.prepare(std::move(model)); !status.ok()) return status;
  if (Status status = counter.judge(); !status.ok()) return status;
  outcome.count->sentences = counter.reservations();
  for (const double shift : request.shifts) {
    auto count = counter.count(shift);
    if (!count.ok()) return count.status();
    outcome.count->counts.push_back(std::move(*count));
  }
  if (Status sound = never_falls(counter, outcome.count->counts); !sound.ok()) return sound;
  if (request.pencil == Pencil::kGeometric && counter.two_sided()) {
    std::vector<std::string>& sentences = outcome.count->sentences;
    const auto [low, high] = std::minmax_element(request.shifts.begin(), request.shifts.end());
    auto other = look_at_the_other_side(counter, *low, *high, outcome, sentences);
    if (!other.ok()) return other.status();
    if (auto convex = convexity_sentence(outcome.count->counts, counter.constrained()))
      sentences.push_back(std::move(*convex));
  }
  return outcome;
}

}  // namespace

Result<Outcome> run_count(const Request& request, const RunContext& context) {
  const Stopwatch watch;
  ThreadPool pool(threads_of(request));
  Outcome outcome = begin_outcome("count", request, Question::kCount);
  auto model = read_model(request, context, pool, outcome);
  if (!model.ok()) return model.status();
  auto result = count_model(std::move(*model), request, context, pool, std::move(outcome));
  if (result.ok()) finish_outcome(*result, watch.seconds());
  return result;
}

}  // namespace stanchion
