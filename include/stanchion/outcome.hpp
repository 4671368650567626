// What a run answers: plain data, filled by the engine, rendered by the reports.
// The JSON written from it is described in data/schemas/outcome-1.json, key for key.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "stanchion/located.hpp"
#include "stanchion/status.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

/// How strongly a statement is backed.
enum class Level { kNone, kStatistical, kProved };

enum class Verdict {
  kPositiveDefinite,
  kPositiveSemidefinite,  ///< at the resolution
  kNegativeSemidefinite,  ///< at the resolution
  kNegativeDefinite,
  kIndefinite,
  kUnresolved,
};

/// Numbers of eigenvalues by sign; zero = within the resolution of zero, of either sign.
/// The four sum to the rows analysed.
struct Inertia {
  Index negative = 0, zero = 0, positive = 0, undecided = 0;
};

/// One factorization of A_s - offset I that a certificate rests on.
struct OffsetRun {
  double offset = 0;                  ///< in units of the scaled matrix
  Index negative = 0;                 ///< negative pivots found
  std::optional<double> error_bound;  ///< proved bound on the 2-norm of the backward error
};

/// The backing of one inertia. Absent members do not apply.
struct Certificate {
  Level level = Level::kNone;
  std::optional<std::string> method;     ///< "offsets" or "relative"
  std::optional<std::string> precision;  ///< "double", "single" or "extended"
  std::optional<double> resolution;      ///< the offset c, in units of the scaled matrix
  std::optional<double> error_bound;     ///< largest eta of the runs
  std::optional<double> relative_bound;  ///< bound on ||F|| of the relative test
  std::optional<double> failure_probability;
  std::vector<std::string> assumptions;
  std::optional<double> smallest_eigenvalue_above;       ///< of the scaled matrix, when definite
  std::optional<double> smallest_eigenvalue_of_k_above;  ///< of the matrix itself, when definite
  std::vector<OffsetRun> runs;
};

/// A vector that shows to anyone that the matrix is not positive definite: one product proves it.
struct Witness {
  std::vector<double> x;                           ///< one entry per equation of the files, zero where struck
  double quadratic_form = 0;                       ///< x^T A x
  double error_bound = 0;                          ///< of that number; quadratic_form + error_bound < 0
  std::optional<std::string> path = std::nullopt;  ///< the file it was written to
};

/// How one statement is backed, on its own.
struct Backing {
  Level level = Level::kNone;
  std::optional<double> failure_probability;  ///< when statistical
};

/// The structure on its constraints (saddle point matrices); absent members: only the range is known.
struct ConstrainedOutcome {
  Index multipliers = 0;
  std::optional<Index> rank;
  std::optional<Index> redundant;
  std::optional<Inertia> inertia;
  std::optional<std::pair<Index, Index>> negative_range;
  Backing rank_backing;     ///< of `rank` and `redundant`
  Backing inertia_backing;  ///< of `inertia` or `negative_range`: the weakest of what they follow from
  std::vector<Index> redundant_equations;  ///< multipliers, from 1 as in the files, whose constraint follows
                                           ///< exactly from others
};

struct CheckOutcome {
  Verdict verdict = Verdict::kUnresolved;
  Inertia inertia;
  Certificate certificate;
  std::optional<Verdict> verdict_for_digits;  ///< with --digits: for all matrices that round to the file
  std::optional<ConstrainedOutcome> constrained;
  std::optional<Witness> witness;
};

/// The answer at one shift.
struct ShiftCount {
  double shift = 0;
  std::optional<Index> below;  ///< absent when only the range is known
  std::string meaning;         ///< what is counted, in words
  Level level = Level::kNone;
  std::optional<std::string> method;
  std::optional<double> failure_probability;
  std::pair<Index, Index> below_range{0, 0};               ///< least, most
  std::optional<std::pair<double, double>> holds_outside;  ///< no statement for true shifts inside
  std::optional<double> no_eigenvalue_within;              ///< certified distance from the shift, where known
  Certificate certificate;
};

struct CountOutcome {
  std::vector<ShiftCount> counts;
  std::vector<std::string> sentences;  ///< consequences worth saying (convexity, factors on the other side)
};

/// Values between two shifts of a sweep, or around one that lies on a value. Each is counted in one of them.
struct Jump {
  double low = 0, high = 0;
  Index count = 0;  ///< of values in [low, high]; for K not definite: change of the inertia, of either sign
};

/// Two certified counts that cannot both be true: a defect of the machine or the program.
struct Contradiction {
  double shift = 0, other_shift = 0;
  Index least = 0, most = 0;  ///< at least so many values by the one, at most so many by the other
};

struct SweepOutcome {
  std::vector<Jump> jumps;  ///< ascending; count, with every shift ascending, is in Outcome::count
  std::vector<Contradiction> contradictions;
  int side_by_side = 1;  ///< shifts that ran at a time, as the memory forecast allowed
  Index resumed = 0;     ///< counts taken over from an interrupted sweep
};

/// A mode shape of a bracketed value.
struct Mode {
  std::vector<double> shape;     ///< one entry per equation of the files, zero where struck; largest entry 1
  double rayleigh_quotient = 0;  ///< as computed: the value of the pencil that belongs to the shape
  double residual = 0;           ///< relative, in the energy norm: no further from a value than this
};

/// One eigenvalue, or a group that is not told apart, in an interval that certainly holds it.
struct CriticalValue {
  double value = 0, low = 0, high = 0;
  Index multiplicity = 1;  ///< eigenvalues in [low, high]: so many at least, and exactly where all are shown
  Level level = Level::kNone;
  std::string proof;  ///< "counts" or "residual"
  std::optional<double> failure_probability;
  bool rigid_body = false;  ///< K - s M with K singular: the zeros, apart from the frequencies
  std::vector<Mode> modes;
};

/// How many values a range holds, by certified counts at its ends.
struct CountedRange {
  double from = 0, to = 0;
  std::optional<Index> count;
  Level level = Level::kNone;
  std::optional<double> failure_probability;
};

struct BracketOutcome {
  std::vector<CriticalValue> critical;   ///< ascending
  std::optional<CountedRange> complete;  ///< absent: completeness is not shown
  std::optional<CountedRange> other_side;
  std::optional<bool> none_below;  ///< of the range asked; absent when it could not be told
  Index more_than_asked = 0;       ///< a cluster at the end was taken in whole
  bool in_hertz = false;           ///< frequencies were asked for; `critical` is in s all the same
  std::vector<std::string> sentences;
};

enum class AuditVerdict { kComplete, kMissing, kSurplus, kMissingAndSurplus, kUnresolved };

/// A stretch of the audited range where list and count differ.
struct AuditGap {
  double low = 0, high = 0;
  Index listed = 0, counted = 0;
  std::vector<std::string> labels;  ///< of the values listed in it: label, or the number itself
};

struct AuditOutcome {
  AuditVerdict verdict = AuditVerdict::kUnresolved;
  std::vector<AuditGap> gaps;
  CountedRange range;
  Index listed = 0;            ///< values in the range
  std::vector<double> values;  ///< those, as shifts of the pencil, ascending
  Index outside = 0;           ///< values left out, outside the range asked
  std::string proof;           ///< "counts": every stretch between two counts holds as many as are listed
  std::vector<CriticalValue> missing;  ///< with find_missing: brackets of what the gaps hold
  std::vector<std::string> sentences;
  bool in_hertz = false;
};

/// One matrix of a load path.
struct PathStep {
  std::string path;
  std::string sha256;
  Verdict verdict = Verdict::kUnresolved;
  Inertia inertia;
  Certificate certificate;
  bool changed = false;  ///< the inertia differs from that of the step before
};

struct PathOutcome {
  std::vector<PathStep> steps;
  std::optional<Index> first_not_definite;  ///< number of the step, from 1
  std::optional<Index> first_negative;      ///< the first with a certified negative direction
};

struct ForecastOutcome {
  Offset factor_entries = 0;
  double factor_flops = 0;
  Offset peak_bytes_count = 0;  ///< factor discarded
  Offset peak_bytes_solve = 0;  ///< factor kept
  Offset peak_bytes_locate =
      0;               ///< factor kept, and the vectors of locating so many directions as are shown unasked
  double seconds = 0;  ///< of one count, as it is likely to be certified
  double seconds_otherwise = 0;  ///< when that does not settle it
  double factorization_seconds = 0;
  Index factorizations = 0;            ///< of the likely way
  bool relative_test = false;          ///< it ends with the relative test
  double flops_per_second = 0;         ///< measured: one thread, in large fronts
  std::string assumption;              ///< what `seconds` rests on, in words
  int side_by_side = 1;                ///< shifts of a sweep that may run at a time
  Offset peak_bytes_side_by_side = 0;  ///< all of these, as they are likely to be certified
  double seconds_side_by_side = 0;     ///< of one shift among them, the matrix not being definite there
};

struct InputRecord {
  std::string role;  ///< "stiffness", "geometric", "mass" or "added"
  std::string path;
  std::string sha256;
  Index rows = 0;
  Offset entries = 0;            ///< entries of the lower triangle held after reading
  std::optional<double> factor;  ///< for "added"
};

/// A file beside the matrices: names, places, lists.
struct TableRecord {
  std::string role;  ///< "dofs", "nodes", "axes", "fix", "multipliers" or "values"
  std::string path;
  std::string sha256;
};

struct Timings {
  double read = 0, order = 0, analyse = 0, factor = 0, certify = 0, total = 0;
};

struct Work {
  double factor_flops = 0;  ///< of one factorization, without relaxation zeros
  Offset factor_entries = 0;
  Index supernodes = 0;
  Index largest_front = 0;
  Index redone_in_double = 0;  ///< factorizations in single precision that could not certify themselves
  Offset delayed_pivots = 0;
  Offset two_by_two_pivots = 0;
  Index factorizations = 0;
  bool analysis_reused = false;  ///< the elimination order was found in the analysis store
};

struct MemoryUse {
  Offset forecast = 0, peak = 0;
};

/// One statistical attempt, charged to the risk before its vectors were drawn, whatever came of it.
struct RiskEvent {
  std::optional<double>
      factor;              ///< of the second matrix in the sum that was tried; absent: K with what is added
  double charged = 0;      ///< failure probability
  bool certified = false;  ///< the attempt passed
};

struct HostRecord {
  int cores = 1;
  std::string blas, isa;
};

/// Everything a report needs. Exactly one of check, count, bracket, audit, forecast is present; with `sweep`
/// also count, with `path` also check (of the step that decides).
struct Outcome {
  std::string command;
  std::vector<std::string> arguments;
  std::vector<InputRecord> inputs;
  std::vector<TableRecord> tables;
  HostRecord host;
  Index rows_analysed = 0;
  Index rows_struck = 0;  ///< equations removed before analysis (fixed or held dofs)
  Timings timings;
  Work work;
  MemoryUse memory;
  Warnings warnings;
  std::vector<std::string> not_checked;
  double risk = 0;          ///< spent: total failure probability of the statistical statements
  double risk_allowed = 0;  ///< the budget of the document
  std::uint64_t seed = 1;
  std::vector<RiskEvent> events;  ///< in order
  std::string struck_sha256;      ///< of the equations struck, from 1, ascending, one a line; empty when none
  std::string scaling_sha256;     ///< of the exponents of the scaling, by equation analysed, one a line
  std::optional<std::string> title, reference;
  std::optional<int> digits;  ///< of the input files, as the request states them
  std::optional<CheckOutcome> check;
  std::optional<CountOutcome> count;
  std::optional<SweepOutcome> sweep;
  std::optional<BracketOutcome> bracket;
  std::optional<AuditOutcome> audit;
  std::optional<PathOutcome> path;
  std::optional<ForecastOutcome> forecast;
  std::optional<LocateOutcome> located;  ///< beside `check`: locate, or check --locate
};

}  // namespace stanchion
