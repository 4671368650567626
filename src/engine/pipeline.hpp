// Request in, outcome out: the three questions of the main job.
#pragma once

#include "base/cancellation.hpp"
#include "stanchion/outcome.hpp"
#include "stanchion/request.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// One count of a sweep with the statistical attempts it made, as kept between runs.
struct JournalEntry {
  Index number = 0;  ///< of the event in the document, see PreparedPencil::certify_apart
  ShiftCount count;
  std::vector<RiskEvent> events;
};

/// Where the counts of a sweep are kept as they come, so that an interrupted one goes on where it stopped.
class CountJournal {
 public:
  virtual ~CountJournal() = default;

  /// Once the matrices are read, before the first count; `begun` holds the digests of the inputs. What an
  /// earlier run of the same question has left; bad input when it was another question.
  virtual Result<std::vector<JournalEntry>> open(const Outcome& begun) = 0;

  /// As soon as a count is there; never from two threads at once.
  virtual Status record(const JournalEntry& entry) = 0;
};

/// What a run may use of its surroundings. All members are optional; the pointees outlive the call.
struct RunContext {
  ProgressCallback progress;
  const CancellationToken* cancel = nullptr;
  std::function<void(const std::string& line)> log;  ///< one line a stage, for --log
  CountJournal* journal = nullptr;                   ///< for sweep
  std::function<void(const ShiftCount&)>
      on_count;  ///< every count of a sweep as it comes; never from two threads at once
};

/// Reads, analyses and judges the stiffness matrix of `request` (with every --add): is it positive definite,
/// and if not, its inertia at the resolution, with the certificate of two offset factorizations.
Result<Outcome> run_check(const Request& request, const RunContext& context);

/// The same, and where and why: the outcome's `located` is set beside `check`, unless the inertia is
/// unresolved. Unusable dof maps, node tables and axes are left out with a warning. Resource limit when the
/// factor cannot be kept.
Result<Outcome> run_locate(const Request& request, const RunContext& context);

/// Counts at every shift of `request`, in the order asked.
Result<Outcome> run_count(const Request& request, const RunContext& context);

/// Counts over a grid of shifts, side by side where memory allows, and where asked at new shifts where the
/// count jumps. The outcome's `count` and `sweep` are set.
Result<Outcome> run_sweep(const Request& request, const RunContext& context);

/// The values asked, each in an interval with its multiplicity and proof, and a statement of completeness.
/// The outcome's `bracket` is set.
Result<Outcome> run_bracket(const Request& request, const RunContext& context);

/// Is the list of `request` complete in its range, and is everything in it real? The outcome's `audit` is
/// set.
Result<Outcome> run_audit(const Request& request, const RunContext& context);

/// Reads and analyses only: factor size, flops, peak memory and likely time before anything is factored.
Result<Outcome> run_forecast(const Request& request, const RunContext& context);

}  // namespace stanchion
