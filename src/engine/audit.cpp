#include <algorithm>
#include <cmath>
#include <cstdio>

#include "base/clock.hpp"
#include "base/fault_words.hpp"
#include "engine/bracket_counts.hpp"
#include "engine/bracket_residual.hpp"
#include "engine/side_by_side.hpp"
#include "io/value_list.hpp"
#include "model/frequency.hpp"
#include "model/shift_grid.hpp"
#include "spectrum/listed_values.hpp"

namespace stanchion {
namespace {

constexpr double kTolerance = 1e-6;  ///< relative, of values that state none
/// How far beyond the outermost value listed the range goes where the user names no end, relative.
constexpr double kBeyond = 1e-9;

std::string number(double value) {
  char text[32];
  std::snprintf(text, sizeof(text), "%.10g", value);
  return text;
}

class Audit {
 public:
  Audit(PencilCounter& counter, const Request& request, const RunContext& context, ThreadPool& pool,
        Outcome& outcome)
      : counter_(counter),
        request_(request),
        asked_(request.audit),
        context_(context),
        pool_(pool),
        outcome_(outcome),
        answer_(outcome.audit.emplace()) {}

  Status run(const std::vector<ListedValue>& list) {
    answer_.in_hertz = asked_.unit == ValueUnit::kHertz;
    // The range of a list of factors begins at 0, which must be no value.
    if (request_.pencil != Pencil::kGeometric || !fast()) {
      if (Status status = counter_.judge(); !status.ok()) return status;
    }
    take_list(list);
    Result<bool> done = fast() ? by_residuals() : false;
    if (!done.ok()) return done.status();
    if (*done || unresolved_) return {};
    return by_counts();
  }

 private:
  bool fast() const {
    return !request_.digits && !request_.resolution && request_.precision != Precision::kExtended &&
           !counter_.constrained();
  }

  // ---- the list
  // -----------------------------------------------------------------------------------------------------

  ValueSpan span_of(const ListedValue& listed, std::size_t number_in_list) const {
    const double width = listed.tolerance ? *listed.tolerance
                                          : asked_.tolerance.value_or(kTolerance) * std::fabs(listed.value);
    const double low = shift_of(listed.value - width, asked_.unit),
                 high = shift_of(listed.value + width, asked_.unit);
    return {low, high, 1, {number_in_list}};
  }

  void take_list(const std::vector<ListedValue>& list) {
    list_ = list;
    double low = INFINITY, high = -INFINITY;
    for (std::size_t k = 0; k < list.size(); ++k) {
      const ValueSpan span = span_of(list[k], k);
      low = std::min(low, span.low);
      high = std::max(high, span.high);
    }
    choose_range(low, high);
    place_list();
  }

  /// What the list holds of the range.
  void place_list() {
    answer_.outside = 0;
    answer_.values.clear();
    spans_.assign(list_.size(), {});
    std::vector<ValueSpan> inside;
    for (std::size_t k = 0; k < list_.size(); ++k) {
      ValueSpan span = span_of(list_[k], k);
      const double value = shift_of(list_[k].value, asked_.unit);
      if (value < from_ || value > to_) {
        ++answer_.outside;
        continue;
      }
      span.low = std::max(span.low, from_);
      span.high = std::min(span.high, to_);
      spans_[k] = span;
      answer_.values.push_back(value);
      inside.push_back(std::move(span));
    }
    answer_.listed = static_cast<Index>(inside.size());
    std::sort(answer_.values.begin(), answer_.values.end());
    clusters_ = clusters_of(std::move(inside));
  }

  /// Lists of one sign are judged from 0 or from everything, for what is missed below the first value matters
  /// most.
  void choose_range(double low, double high) {
    const bool factors = request_.pencil == Pencil::kGeometric || counter_.two_sided();
    const auto beyond = [](double end, int direction) {
      const double size = kBeyond * std::fabs(end);
      return shortest_within(end + direction * size, size / 2);
    };
    const double lowest = counter_.kind() == CountKind::kAbove ? counter_.origin() : -INFINITY;
    from_ = factors ? (low > 0 ? 0 : beyond(low, -1)) : lowest;
    to_ = factors && high < 0 ? 0 : beyond(high, 1);
    if (asked_.from) from_ = shift_of(*asked_.from, asked_.unit);
    if (asked_.to) to_ = shift_of(*asked_.to, asked_.unit);
  }

  std::string label_of(std::size_t k) const {
    return list_[k].label.empty() ? number(list_[k].value) : list_[k].label;
  }

  // ---- what is certain
  // ------------------------------------------------------------------------------------------

  Result<bool> by_residuals() {
    ResidualQuestion question;
    if (std::isfinite(from_)) question.range.low = from_;
    question.range.high = to_;
    question.past_values = true;
    auto answer = bracket_by_residuals(counter_, request_, context_, question, pool_, outcome_);
    if (!answer.ok()) return answer.status();
    known_ = std::move(answer->counts);
    if (counter_.kind() == CountKind::kDirections) {
      give_up();
      return false;
    }
    if (!answer->found || !answer->found->complete) return false;
    const FoundRange& found = *answer->found;
    take_range(*found.complete, answer->on_ends);
    std::vector<ValueSpan> certain;
    for (const FoundValues& values : found.values)
      certain.push_back({values.low, values.high, values.count, {}});
    answer_.range = *found.complete;
    for (const FoundValues& values : found.values) rest_on(values.level);
    answer_.proof = "residual intervals of all values, and counts at the ends of the range";
    report(compare_spans(clusters_, certain, from_, to_), &found);
    return true;
  }

  /// The range that is complete, where an end asked lies on a value: it goes on to behind that.
  void take_range(const CountedRange& complete, Index on_ends) {
    if (complete.from == from_ && complete.to == to_) return;
    from_ = complete.from;
    to_ = complete.to;
    place_list();
    if (on_ends == 0) return;
    counter_.warn(
        "end-on-value",
        "an end of the range lies on a value, or too close to it to tell on which side: the list is "
        "judged up to behind that value. Remedy: give --from and --to a little elsewhere");
  }

  /// The verdict rests on all that is known inside the range, not on the counts at its ends alone: when any
  /// of it may fail, so may the verdict, with no more than the document has spent so far.
  void rest_on(Level level) {
    if (level != Level::kStatistical) return;
    answer_.range.level = Level::kStatistical;
    answer_.range.failure_probability = outcome_.risk;
  }

  /// Every gap of the list is counted in: two counts at the ends would let a missing and a surplus value
  /// cancel out.
  Status by_counts() {
    if (counter_.kind() == CountKind::kDirections) {
      if (Status status = counter_.judge(); !status.ok()) return status;
    }
    if (counter_.kind() == CountKind::kDirections) {
      give_up();
      return {};
    }
    CountRunner runner(counter_, context_, pool_, outcome_);
    if (Status status = runner.open(); !status.ok()) return status;
    std::vector<double> shifts = shifts_in_gaps(clusters_, from_, to_);
    if (from_nothing()) shifts.erase(shifts.begin());
    const auto warnings = outcome_.warnings.size();
    auto counts = runner.run(shifts);
    if (!counts.ok()) return counts.status();
    outcome_.warnings.resize(warnings);
    const auto stretches = stretches_between(*counts);
    if (!stretches) return {};
    const std::vector<double> ends = ends_of_tolerances(*stretches);
    auto at_ends = runner.run(ends);
    if (!at_ends.ok()) return at_ends.status();
    outcome_.warnings.resize(warnings);
    for (const ShiftCount& count : *at_ends) {
      if (const auto fact = counter_.fact(count)) known_.add(*fact);
    }
    if (!known_.contradictions().empty())
      return Status::internal(std::string("certified counts contradict each other: ") + kMachineOrProgram);
    rest_on(answer_.range.level);
    for (const CountFact& fact : known_.facts()) rest_on(fact.level);
    report(*stretches, nullptr);
    return {};
  }

  /// Where the numbers agree, the ends of what each listed value may be off by: the right number may still be
  /// of other values.
  std::vector<double> ends_of_tolerances(const std::vector<Stretch>& stretches) const {
    std::vector<double> ends;
    for (const Stretch& stretch : stretches) {
      if (stretch.listed != stretch.certain) continue;
      for (const std::size_t k : stretch.members) {
        for (const double end : {spans_[k].low, spans_[k].high}) {
          if (end > from_ && end < to_ && known_.at(end) == nullptr) ends.push_back(end);
        }
      }
    }
    std::sort(ends.begin(), ends.end());
    ends.erase(std::unique(ends.begin(), ends.end()), ends.end());
    return ends;
  }

  /// Nothing is counted below the range: its lower end needs no count.
  bool from_nothing() const {
    return !std::isfinite(from_) || (counter_.kind() == CountKind::kAbove && from_ == counter_.origin());
  }

  std::optional<std::vector<Stretch>> stretches_between(const std::vector<ShiftCount>& counts) {
    answer_.proof = "counts in every gap of the list, and at the ends of every tolerance";
    std::vector<CountFact> facts;
    if (!std::isfinite(from_)) {
      facts.push_back({from_, 0, 0, std::nullopt, Level::kProved, 0});
    } else if (from_nothing()) {
      facts.push_back(counter_.fact_at_origin());
    }
    for (const ShiftCount& count : counts) {
      const auto fact = counter_.fact(count);
      // A shift of ours that cannot tell is left out: the clusters on its two sides are then judged together.
      if (fact && fact->exact()) facts.push_back(*fact);
    }
    if (facts.size() < 2 || facts.front().shift != from_ || facts.back().shift != to_) {
      counter_.warn(
          "end-of-range",
          "an end of the range lies on a value, or cannot be counted at. Remedy: give --from and --to a "
          "little elsewhere");
      give_up();
      return std::nullopt;
    }
    for (const CountFact& fact : facts) {
      if (std::isfinite(fact.shift) && known_.at(fact.shift) == nullptr) known_.add(fact);
    }
    std::vector<Stretch> stretches;
    for (std::size_t k = 1; k < facts.size(); ++k) {
      Stretch stretch{facts[k - 1].shift,
                      facts[k].shift,
                      0,
                      static_cast<Index>(facts[k].least - facts[k - 1].least),
                      {},
                      {}};
      for (const ValueSpan& cluster : clusters_) {
        if (cluster.low < stretch.low || cluster.high > stretch.high) continue;
        stretch.listed += cluster.count;
        stretch.members.insert(stretch.members.end(), cluster.members.begin(), cluster.members.end());
      }
      stretches.push_back(std::move(stretch));
    }
    answer_.range = counted_range(std::isfinite(from_) ? std::optional(facts.front()) : std::nullopt,
                                  facts.back(), from_, to_);
    return stretches;
  }

  // ---- verdict
  // ------------------------------------------------------------------------------------------------------

  void give_up() {
    unresolved_ = true;
    answer_.verdict = AuditVerdict::kUnresolved;
    answer_.range = {from_, to_, std::nullopt, Level::kNone, std::nullopt};
  }

  /// As many listed as there are, and each within its tolerance of one of its own.
  bool fits(const Stretch& stretch, const FoundRange* found) {
    std::vector<ValueSpan> listed, certain;
    for (const std::size_t k : stretch.members) listed.push_back(spans_[k]);
    if (found == nullptr) {
      const Placement placed = placement(listed, known_.facts());
      placement_open_ = placement_open_ || placed == Placement::kOpen;
      return placed != Placement::kRefuted;
    }
    for (const std::size_t k : stretch.certain_spans) {
      const FoundValues& values = found->values[k];
      certain.push_back({values.low, values.high, values.count, {}});
    }
    if (!each_has_its_own(listed, certain)) return false;
    placement_open_ = placement_open_ || !each_surely_has_its_own(listed, certain);
    return true;
  }

  void report(const std::vector<Stretch>& stretches, const FoundRange* found) {
    bool missing = false, surplus = false;
    for (const Stretch& stretch : stretches) {
      if (stretch.listed == stretch.certain && fits(stretch, found)) continue;
      missing = missing || stretch.certain >= stretch.listed;
      surplus = surplus || stretch.certain <= stretch.listed;
      AuditGap gap{stretch.low, stretch.high, stretch.listed, stretch.certain, {}};
      for (const std::size_t k : stretch.members) gap.labels.push_back(label_of(k));
      answer_.gaps.push_back(std::move(gap));
      if (found == nullptr || !asked_.find_missing || stretch.certain < stretch.listed) continue;
      for (const std::size_t k : stretch.certain_spans)
        answer_.missing.push_back(critical_of(found->values[k]));
    }
    answer_.verdict = missing && surplus ? AuditVerdict::kMissingAndSurplus
                      : missing          ? AuditVerdict::kMissing
                      : surplus          ? AuditVerdict::kSurplus
                                         : AuditVerdict::kComplete;
    if (placement_open_ && found != nullptr) {
      answer_.sentences.emplace_back(
          "Where the numbers agree every value listed may be within its tolerance of one of its own. That it "
          "is could not be shown for all: some of the intervals that certainly hold values are wider than "
          "the tolerance.");
    } else if (placement_open_) {
      answer_.proof = "counts in every gap of the list";
      answer_.sentences.emplace_back(
          "The number in every gap is certified. That every value listed is within its tolerance of one of "
          "its own could "
          "not be shown: the end of a tolerance lies on a value, or cannot be counted at.");
    }
    if (missing && surplus) {
      answer_.sentences.emplace_back(
          "A value listed beyond its tolerance from a true one counts twice: surplus where it is listed, "
          "missing where it is.");
    }
  }

 public:
  /// What the gaps hold, where counts alone found them.
  Status find_missing() {
    if (!asked_.find_missing || !answer_.missing.empty()) return {};
    for (const AuditGap& gap : answer_.gaps) {
      if (gap.counted <= gap.listed || !std::isfinite(gap.low)) continue;
      auto found =
          bracket_by_counts(counter_, request_, {gap.low, gap.high}, std::nullopt, false, known_, outcome_);
      if (!found.ok()) return found.status();
      for (const FoundValues& values : found->values) answer_.missing.push_back(critical_of(values));
    }
    return {};
  }

 private:
  static CriticalValue critical_of(const FoundValues& values) {
    CriticalValue critical;
    critical.value = values.value;
    critical.low = values.low;
    critical.high = values.high;
    critical.multiplicity = values.count;
    critical.level = values.level;
    critical.proof = values.proof;
    if (values.level == Level::kStatistical) critical.failure_probability = values.failure_probability;
    return critical;
  }

  PencilCounter& counter_;
  const Request& request_;
  const AuditRequest& asked_;
  const RunContext& context_;
  ThreadPool& pool_;
  Outcome& outcome_;
  AuditOutcome& answer_;
  std::vector<ListedValue> list_;
  std::vector<ValueSpan> spans_;  ///< by number in the list; empty ones outside of the range
  std::vector<ValueSpan> clusters_;
  Staircase known_;
  double from_ = 0, to_ = 0;
  bool unresolved_ = false, placement_open_ = false;
};

Result<Outcome> audit_model(ModelInput model, const Request& request, const RunContext& context,
                            ThreadPool& pool, Outcome outcome) {
  auto list = read_values(request.audit.values);
  if (!list.ok()) return list.status();
  PencilCounter counter(request, context, pool, outcome);
  if (Status status = counter.prepare(std::move(model)); !status.ok()) return status;
  Audit audit(counter, request, context, pool, outcome);
  if (Status status = audit.run(*list); !status.ok()) return status;
  if (Status status = audit.find_missing(); !status.ok()) return status;
  within_document(outcome.audit->range.failure_probability, outcome);
  for (CriticalValue& value : outcome.audit->missing) within_document(value.failure_probability, outcome);
  return outcome;
}

}  // namespace

Result<Outcome> run_audit(const Request& request, const RunContext& context) {
  const Stopwatch watch;
  ThreadPool pool(threads_of(request));
  Outcome outcome = begin_outcome("audit", request, Question::kAudit);
  auto model = read_model(request, context, pool, outcome);
  if (!model.ok()) return model.status();
  auto result = audit_model(std::move(*model), request, context, pool, std::move(outcome));
  if (result.ok()) finish_outcome(*result, watch.seconds());
  return result;
}

}  // namespace stanchion
