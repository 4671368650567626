// What a run answers: plain data, filled by the engine, rendered by the reports.
// The JSON written from it is described in data/schemas/outcome-1.json, key for key.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <vector>

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
  std::optional<std::string> method;      ///< "offsets" or "relative"
  std::optional<std::string> precision;   ///< "double", "single" or "extended"
  std::optional<double> resolution;       ///< the offset c, in units of the scaled matrix
  std::optional<double> error_bound;      ///< largest eta of the runs
  std::optional<double> relative_bound;   ///< bound on ||F|| of the relative test
  std::optional<double> failure_probability;
  std::vector<std::string> assumptions;
  std::optional<double> smallest_eigenvalue_above;  ///< of the scaled matrix, when definite
  std::optional<double> smallest_eigenvalue_of_k_above;  ///< of the matrix itself, when definite
  std::vector<OffsetRun> runs;
};

/// A vector that shows to anyone that the matrix is not positive definite: one product proves it.
struct Witness {
  std::vector<double> x;      ///< one entry per equation of the files, zero where struck
  double quadratic_form = 0;  ///< x^T A x
  double error_bound = 0;     ///< of that number; quadratic_form + error_bound < 0
  std::optional<std::string> path = std::nullopt;  ///< the file it was written to
};

/// The structure on its constraints (saddle point matrices); absent members: only the range is known.
struct ConstrainedOutcome {
  Index multipliers = 0;
  std::optional<Index> rank;
  std::optional<Index> redundant;
  std::optional<Inertia> inertia;
  std::optional<std::pair<Index, Index>> negative_range;
  std::vector<Index> redundant_equations;  ///< multipliers, from 1 as in the files, whose constraint repeats another
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
  std::pair<Index, Index> below_range{0, 0};                 ///< least, most
  std::optional<std::pair<double, double>> holds_outside;    ///< no statement for true shifts inside
  std::optional<double> no_eigenvalue_within;                ///< certified distance from the shift, where known
  Certificate certificate;
};

struct CountOutcome {
  std::vector<ShiftCount> counts;
  std::vector<std::string> sentences;  ///< consequences worth saying (convexity, factors on the other side)
};

struct ForecastOutcome {
  Offset factor_entries = 0;
  double factor_flops = 0;
  Offset peak_bytes_count = 0;  ///< factor discarded
  Offset peak_bytes_solve = 0;  ///< factor kept
  double seconds = 0;
};

struct InputRecord {
  std::string role;  ///< "stiffness", "geometric", "mass" or "added"
  std::string path;
  std::string sha256;
  Index rows = 0;
  Offset entries = 0;  ///< entries of the lower triangle held after reading
  std::optional<double> factor;  ///< for "added"
};

struct Timings {
  double read = 0, order = 0, analyse = 0, factor = 0, certify = 0, total = 0;
};

struct Work {
  double factor_flops = 0;  ///< of one factorization, without relaxation zeros
  Offset factor_entries = 0;
  Index supernodes = 0;
  Index largest_front = 0;
  Offset delayed_pivots = 0;
  Offset two_by_two_pivots = 0;
  Index factorizations = 0;
};

struct MemoryUse {
  Offset forecast = 0, peak = 0;
};

/// One statistical attempt, charged to the risk before its vectors were drawn, whatever came of it.
struct RiskEvent {
  std::optional<double> factor;  ///< of the second matrix in the sum that was tried; absent: K with what is added
  double charged = 0;            ///< failure probability
  bool certified = false;        ///< the attempt passed
};

struct HostRecord {
  int cores = 1;
  std::string blas, isa;
};

/// Everything a report needs. Exactly one of check, count, forecast is present.
struct Outcome {
  std::string command;
  std::vector<std::string> arguments;
  std::vector<InputRecord> inputs;
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
  std::optional<CheckOutcome> check;
  std::optional<CountOutcome> count;
  std::optional<ForecastOutcome> forecast;
};

}  // namespace stanchion
