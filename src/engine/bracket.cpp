#include <algorithm>
#include <cmath>

#include "base/clock.hpp"
#include "engine/bracket_counts.hpp"
#include "engine/bracket_residual.hpp"
#include "engine/other_side.hpp"
#include "io/shortest.hpp"
#include "model/frequency.hpp"

namespace stanchion {
namespace {

class Bracketer {
 public:
  Bracketer(PencilCounter& counter, const Request& request, const RunContext& context, ThreadPool& pool,
            Outcome& outcome)
      : counter_(counter),
        request_(request),
        asked_(request.bracket),
        context_(context),
        pool_(pool),
        outcome_(outcome),
        answer_(outcome.bracket.emplace()) {}

  Status run() {
    answer_.in_hertz = asked_.unit == ValueUnit::kHertz;
    const ValueRange range = asked_range();
    if (asked_.safety && request_.pencil == Pencil::kGeometric) {
      auto settled = safe_on_both_sides(range);
      if (!settled.ok()) return settled.status();
      if (*settled) return {};
    }
    Result<bool> answered = uses_residuals() ? by_residuals(range) : false;
    if (!answered.ok()) return answered.status();
    if (!*answered) {
      if (Status status = by_counts(range); !status.ok()) return status;
    }
    if (Status status = look_at_other_side(range); !status.ok()) return status;
    if (!asked_.first) answer_.none_below = none_in_range();
    if (asked_.safety) say_safety(range);
    for (CriticalValue& value : answer_.critical) within_document(value.failure_probability, outcome_);
    for (auto* counted : {&answer_.complete, &answer_.other_side}) {
      if (*counted) within_document((*counted)->failure_probability, outcome_);
    }
    return {};
  }

 private:
  /// In the pencil's unit. `--below B` of factors is the range between 0 and B; of eigenvalues, everything
  /// below B.
  ValueRange asked_range() const {
    ValueRange range;
    if (asked_.first) return range;
    if (asked_.from) range.low = shift_of(*asked_.from, asked_.unit);
    if (asked_.to) range.high = shift_of(*asked_.to, asked_.unit);
    if (asked_.below && request_.pencil == Pencil::kGeometric) {
      if (!range.low) range.low = 0;
      if (!range.high) range.high = 0;
    }
    return range;
  }

  /// The residual intervals hold for the numbers as written, in double precision, from a definite matrix.
  bool uses_residuals() const {
    return asked_.method == BracketMethod::kResidual && !request_.digits && !request_.resolution &&
           request_.precision != Precision::kExtended && !counter_.constrained();
  }

  // ---- is there none
  // ------------------------------------------------------------------------------------------------

  /// K + b G and K - b G both definite: so is K, their mean, and everything between. True when that settles
  /// it.
  Result<bool> safe_on_both_sides(const ValueRange& range) {
    if (*range.low > 0 || *range.high < 0) return false;
    const double reach = std::max(-*range.low, *range.high);
    const bool far_end_asked_first = *range.high >= -*range.low;
    std::vector<CertifiedInertia> both;
    for (const double end : {far_end_asked_first ? reach : -reach, far_end_asked_first ? -reach : reach}) {
      auto found = counter_.inertia_at(end, true);
      if (!found.ok()) return found.status();
      if (verdict_of(found->inertia, found->certificate.level) != Verdict::kPositiveDefinite) {
        return false;
      }
      both.push_back(std::move(*found));
    }
    const Level level = std::min(both[0].certificate.level, both[1].certificate.level);
    std::optional<double> failure;
    if (level == Level::kStatistical) {
      failure = both[0].certificate.failure_probability.value_or(0) +
                both[1].certificate.failure_probability.value_or(0);
    }
    answer_.complete = CountedRange{*range.low, *range.high, 0, level, failure};
    if (*range.low == 0 || *range.high == 0) {
      answer_.other_side = *range.low == 0 ? CountedRange{-reach, 0, 0, level, failure}
                                           : CountedRange{0, reach, 0, level, failure};
    }
    answer_.none_below = true;
    answer_.sentences.push_back(
        "K + f G is positive definite at every f in [" + number_text(-reach) + ", " + number_text(reach) +
        "], because it is at the ends (convexity): no critical factor lies there, of either sign.");
    return true;
  }

  std::optional<bool> none_in_range() const {
    if (counter_.kind() == CountKind::kDirections) return std::nullopt;
    if (answer_.complete && answer_.complete->count) {
      if (*answer_.complete->count > 0 && *answer_.complete->count == on_ends_) return std::nullopt;
      return *answer_.complete->count == 0;
    }
    if (!answer_.critical.empty()) return false;
    return std::nullopt;
  }

  void say_safety(const ValueRange& range) {
    if (counter_.constrained() || request_.pencil != Pencil::kGeometric) return;
    if (answer_.none_below == true && counter_.two_sided() && *range.low <= 0 && *range.high >= 0) {
      answer_.sentences.push_back("K + f G is positive definite at every f in [" + number_text(*range.low) +
                                  ", " + number_text(*range.high) +
                                  "], because it is at the ends (convexity).");
    }
  }

  // ---- brackets
  // -------------------------------------------------------------------------------------------------

  Result<bool> by_residuals(const ValueRange& range) {
    auto answer = bracket_by_residuals(counter_, request_, context_, {range, true, asked_.first, asked_.side},
                                       pool_, outcome_);
    if (!answer.ok()) return answer.status();
    known_ = std::move(answer->counts);
    if (!answer->found) {
      if (counter_.kind() != CountKind::kDirections) {
        counter_.warn("residuals-not-enough",
                      "mode shapes and residuals could not account for every value that was counted; "
                      "bisection by counts "
                      "goes on instead");
      }
      return false;
    }
    const CountFact* at_zero = known_.at(0);
    answer->found->none_at_zero = at_zero != nullptr && at_zero->exact();
    take(*answer->found);
    answer_.more_than_asked = answer->more_than_asked;
    say_number_found(answer->fewer_than_asked);
    on_ends_ = answer->on_ends;
    if (on_ends_ > 0) {
      counter_.warn(
          "end-on-value",
          "an end of the range lies on a value, or too close to it to tell on which side: the value is "
          "listed, and what is complete goes on behind it. Remedy: give the end a little elsewhere");
    }
    return true;
  }

  Status by_counts(const ValueRange& range) {
    if (counter_.kind() == CountKind::kDirections) {
      if (Status status = counter_.judge(); !status.ok()) return status;
    }
    if (counter_.kind() == CountKind::kDirections) return say_what_is_known(range);
    const bool both = asked_.first && asked_.side == Side::kBoth && counter_.two_sided();
    std::vector<CountedRange> ends;
    for (const bool negative : {true, false}) {
      if (asked_.first && !both && negative != (asked_.side == Side::kNegative && counter_.two_sided()))
        continue;
      if (!asked_.first && negative) continue;
      auto found = bracket_by_counts(counter_, request_, range, asked_.first, negative, known_, outcome_);
      if (!found.ok()) return found.status();
      if (found->complete) ends.push_back(*found->complete);
      take(*found);
    }
    if (both) keep_nearest(ends);
    if (asked_.first) {
      Index sum = 0;
      for (const CriticalValue& value : answer_.critical) sum += value.rigid_body ? 0 : value.multiplicity;
      say_number_found(std::max<Index>(0, *asked_.first - sum));
      answer_.more_than_asked = std::max<Index>(0, sum - *asked_.first);
    }
    return {};
  }

  /// Of the first ones on either side those nearest to 0 are the first of both. `ends`: how far each side is
  /// complete; so far, and up to the first value left out, both are.
  void keep_nearest(const std::vector<CountedRange>& ends) {
    std::vector<CriticalValue> all = std::move(answer_.critical);
    std::sort(all.begin(), all.end(), [](const CriticalValue& a, const CriticalValue& b) {
      return std::fabs(a.value) < std::fabs(b.value);
    });
    double reach = ends.size() == 2 ? INFINITY : 0, outermost = 0;
    CountedRange complete{0, 0, Index{0}, Level::kProved, std::nullopt};
    for (const CountedRange& end : ends) {
      reach = std::min(reach, std::max(std::fabs(end.from), std::fabs(end.to)));
      complete.level = std::min(complete.level, end.level);
      if (end.failure_probability)
        complete.failure_probability = complete.failure_probability.value_or(0) + *end.failure_probability;
    }
    answer_.critical.clear();
    for (CriticalValue& value : all) {
      if (*complete.count >= *asked_.first) {
        reach = std::min({reach, std::fabs(value.low), std::fabs(value.high)});
        continue;
      }
      outermost = std::max({outermost, std::fabs(value.low), std::fabs(value.high)});
      *complete.count += value.multiplicity;
      answer_.critical.push_back(std::move(value));
    }
    complete.from = -reach;
    complete.to = reach;
    answer_.complete.reset();
    if (outermost <= reach) answer_.complete = complete;
    std::sort(answer_.critical.begin(), answer_.critical.end(),
              [](const CriticalValue& a, const CriticalValue& b) { return a.low < b.low; });
  }

  void take(const FoundRange& found) {
    for (const FoundValues& values : found.values) {
      CriticalValue critical;
      critical.value = values.value;
      critical.low = values.low;
      critical.high = values.high;
      critical.multiplicity = values.count;
      critical.level = values.level;
      critical.proof = values.proof;
      if (values.level == Level::kStatistical) critical.failure_probability = values.failure_probability;
      critical.rigid_body =
          request_.pencil == Pencil::kMass && !found.none_at_zero && values.low <= 0 && values.high >= 0;
      if (critical.rigid_body) critical.value = 0;
      critical.modes = values.modes;
      answer_.critical.push_back(std::move(critical));
    }
    if (found.complete) answer_.complete = found.complete;
  }

  void say_number_found(Index fewer) {
    if (fewer == 0) return;
    counter_.warn(
        "fewer-than-asked",
        std::to_string(fewer) + " of the values asked do not exist in the range that was searched" +
            (answer_.complete ? ", up to " + number_text(std::max(std::fabs(answer_.complete->to),
                                                                  std::isfinite(answer_.complete->from)
                                                                      ? std::fabs(answer_.complete->from)
                                                                      : 0.0))
                              : ""));
  }

  /// K is not definite (said already): the inertia at the ends is all there is.
  Status say_what_is_known(const ValueRange& range) {
    answer_.sentences = counter_.reservations();
    for (const auto& end : {range.low, range.high}) {
      if (!end || *end == 0) continue;
      auto count = counter_.count(*end);
      if (!count.ok()) return count.status();
      if (!count->below) continue;
      answer_.sentences.push_back("Number of " + count->meaning + " " + number_text(*end) + ": " +
                                  std::to_string(*count->below) + "; no number of values follows from that.");
    }
    return {};
  }

  // ---- the side nobody asked about
  // ----------------------------------------------------------------------------------

  Status look_at_other_side(const ValueRange& range) {
    if (request_.pencil != Pencil::kGeometric || !counter_.two_sided() || !answer_.complete) return {};
    const double low = range.low.value_or(answer_.complete->from),
                 high = range.high.value_or(answer_.complete->to);
    const double inner_low = asked_.first ? answer_.complete->from : low;
    const double inner_high = asked_.first ? answer_.complete->to : high;
    if (inner_low < 0 && inner_high > 0) return {};
    auto looked = look_at_the_other_side(counter_, inner_low, inner_high, outcome_, answer_.sentences);
    if (!looked.ok()) return looked.status();
    const std::optional<ShiftCount>& other = *looked;
    if (!other) return {};
    const auto fact = counter_.fact(*other);
    if (!fact) return {};
    CountedRange range_there{std::min(0.0, other->shift), std::max(0.0, other->shift), other->below,
                             fact->level, std::nullopt};
    if (fact->level == Level::kStatistical) range_there.failure_probability = fact->failure_probability;
    if (!other->below) range_there.level = Level::kNone;
    answer_.other_side = range_there;
    const bool none_here = answer_.complete->count == 0;
    if (none_here && other->below.value_or(1) > 0) {
      counter_.warn("factors-only-on-the-other-side",
                    "there are critical factors on the other side of 0 only: a wrong sign of G would read as "
                    "safe. Remedy: "
                    "make sure of the convention, or ask for both sides");
    }
    return {};
  }

  PencilCounter& counter_;
  const Request& request_;
  const BracketRequest& asked_;
  const RunContext& context_;
  ThreadPool& pool_;
  Outcome& outcome_;
  BracketOutcome& answer_;
  Staircase known_;
  Index on_ends_ = 0;  ///< values that may lie on either side of an end asked
};

Result<Outcome> bracket_model(ModelInput model, const Request& request, const RunContext& context,
                              ThreadPool& pool, Outcome outcome) {
  PencilCounter counter(request, context, pool, outcome);
  if (Status status = counter.prepare(std::move(model)); !status.ok()) return status;
  if (Status status = Bracketer(counter, request, context, pool, outcome).run(); !status.ok()) return status;
  return outcome;
}

}  // namespace

Result<Outcome> run_bracket(const Request& request, const RunContext& context) {
  const Stopwatch watch;
  ThreadPool pool(threads_of(request));
  Outcome outcome = begin_outcome("bracket", request, Question::kBracket);
  auto model = read_model(request, context, pool, outcome);
  if (!model.ok()) return model.status();
  auto result = bracket_model(std::move(*model), request, context, pool, std::move(outcome));
  if (result.ok()) finish_outcome(*result, watch.seconds());
  return result;
}

}  // namespace stanchion
