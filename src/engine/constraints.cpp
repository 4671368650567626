#include "engine/constraints.hpp"

#include <algorithm>
#include <cmath>
#include <map>

#include "engine/exact_dependence.hpp"

namespace stanchion {
namespace {

/// One row of B: columns ascending, with their values.
using ConstraintRow = std::vector<std::pair<Index, double>>;

struct ConstraintRows {
  std::vector<ConstraintRow> rows;  ///< one per multiplier
  bool bordered = true;
};

ConstraintRows extract_rows(const SymmetricMatrix& matrix, const std::vector<Index>& multipliers) {
  std::vector<Index> number_of(static_cast<std::size_t>(matrix.rows), -1);
  for (std::size_t m = 0; m < multipliers.size(); ++m) {
    number_of[static_cast<std::size_t>(multipliers[m])] = static_cast<Index>(m);
  }
  ConstraintRows found{std::vector<ConstraintRow>(multipliers.size()), true};
  for (Index j = 0; j < matrix.rows; ++j) {
    const Index mj = number_of[static_cast<std::size_t>(j)];
    for (Offset k = matrix.column_start[j]; k < matrix.column_start[Offset{j} + 1]; ++k) {
      const Index i = matrix.row[k], mi = number_of[static_cast<std::size_t>(i)];
      if (matrix.value[k] == 0 || (mi < 0 && mj < 0)) continue;
      if (mi >= 0 && mj >= 0) {
        found.bordered = false;
      } else {
        found.rows[static_cast<std::size_t>(mi >= 0 ? mi : mj)].emplace_back(mi >= 0 ? j : i,
                                                                             matrix.value[k]);
      }
    }
  }
  for (ConstraintRow& row : found.rows) std::sort(row.begin(), row.end());
  return found;
}

/// Products above this have no error below the smallest double: fma tells whether they are exact.
constexpr double kNoUnderflow = 0x1p-900;

/// True when `b` is `a` times a number that a double holds, in every entry without error. Rows with tiny
/// entries do not count: their products may lose what no double can show.
bool exact_multiple(const ConstraintRow& a, const ConstraintRow& b) {
  if (a.size() != b.size()) return false;
  const double ratio = b.front().second / a.front().second;
  for (std::size_t k = 0; k < a.size(); ++k) {
    if (a[k].first != b[k].first || !(std::fabs(b[k].second) > kNoUnderflow)) return false;
    if (std::fma(a[k].second, ratio, -b[k].second) != 0) return false;
  }
  return true;
}

/// Marks empty rows and exact multiples of earlier rows.
std::vector<char> repeated_rows(const std::vector<ConstraintRow>& rows) {
  std::vector<char> repeated(rows.size(), 0);
  std::map<std::vector<Index>, std::vector<std::size_t>> same_columns;
  for (std::size_t m = 0; m < rows.size(); ++m) {
    if (rows[m].empty()) {
      repeated[m] = 1;
      continue;
    }
    std::vector<Index> columns;
    for (const auto& [column, value] : rows[m]) columns.push_back(column);
    auto& earlier = same_columns[columns];
    for (const std::size_t other : earlier) repeated[m] = repeated[m] || exact_multiple(rows[other], rows[m]);
    if (!repeated[m]) earlier.push_back(m);
  }
  return repeated;
}

/// Marks rows that follow exactly from others that are not marked.
void mark_dependent(const std::vector<ConstraintRow>& rows, Index columns, std::vector<char>& repeated) {
  std::vector<SparseColumn> vectors;
  std::vector<std::size_t> number;
  for (std::size_t m = 0; m < rows.size(); ++m) {
    if (repeated[m]) continue;
    vectors.emplace_back();
    number.push_back(m);
    for (const auto& [column, value] : rows[m]) vectors.back().push_back({column, value});
  }
  const std::vector<char> dependent = exactly_dependent(vectors, columns, kMostDependenceSteps);
  for (std::size_t k = 0; k < number.size(); ++k) repeated[number[k]] = dependent[k];
}

/// [I B^T; B 0] on the rows kept and the columns they touch.
SymmetricMatrix bordered_identity(const std::vector<ConstraintRow>& rows, const std::vector<char>& repeated) {
  std::map<Index, Index> column_number;
  for (std::size_t m = 0; m < rows.size(); ++m) {
    if (repeated[m]) continue;
    for (const auto& [column, value] : rows[m]) {
      column_number.try_emplace(column, static_cast<Index>(column_number.size()));
    }
  }
  std::vector<Triplet> entries;
  const auto columns = static_cast<Index>(column_number.size());
  for (Index c = 0; c < columns; ++c) entries.push_back({c, c, 1});
  Index next = columns;
  for (std::size_t m = 0; m < rows.size(); ++m) {
    if (repeated[m]) continue;
    for (const auto& [column, value] : rows[m]) entries.push_back({next, column_number[column], value});
    ++next;
  }
  return from_triplets(next, entries);
}

Backing backing_of(const Certificate& certificate) {
  if (certificate.level != Level::kStatistical) return {certificate.level, {}};
  return {certificate.level, certificate.failure_probability};
}

/// What rests on two statements: the weaker level, and either may fail.
Backing both(const Backing& one, const Backing& other) {
  Backing result{std::min(one.level, other.level), {}};
  if (result.level == Level::kStatistical) {
    result.failure_probability = one.failure_probability.value_or(0) + other.failure_probability.value_or(0);
  }
  return result;
}

/// At least so many of either sign; what is left is zero at the resolution. Fewer than p of A's certain signs
/// (soft constraints below the resolution) leave nothing certain, not less than nothing.
Inertia on_constraints(const Inertia& a, Index q, Index p) {
  const Index rows = a.negative + a.zero + a.positive - q - p;
  const Index negative = std::max<Index>(0, a.negative - p), positive = std::max<Index>(0, a.positive - p);
  return {negative, rows - negative - positive, positive, 0};
}

}  // namespace

Result<ConstraintRank> certify_constraint_rank(const ModelInput& model, const Request& request,
                                               const RunContext& context, ThreadPool& pool,
                                               Outcome& outcome) {
  const std::vector<Index>& multipliers = model.multipliers;
  ConstraintRank rank;
  rank.multipliers = static_cast<Index>(multipliers.size());
  const ConstraintRows constraints = extract_rows(model.stiffness, multipliers);
  rank.bordered = constraints.bordered;
  bool summed = false;
  for (const SymmetricMatrix& added : model.added) {
    const ConstraintRows more = extract_rows(added, multipliers);
    rank.bordered = rank.bordered && more.bordered;
    for (const ConstraintRow& row : more.rows) summed = summed || !row.empty();
  }
  rank.most = rank.multipliers;
  if (!rank.bordered || summed) return rank;
  std::vector<char> repeated = repeated_rows(constraints.rows);
  mark_dependent(constraints.rows, model.stiffness.rows, repeated);
  for (std::size_t m = 0; m < multipliers.size(); ++m) {
    if (repeated[m]) rank.repeated.push_back(multipliers[m]);
  }
  const Index distinct = rank.multipliers - static_cast<Index>(rank.repeated.size());
  rank.backing.level = Level::kProved;
  rank.most = distinct;
  if (distinct == 0) return rank;
  ModelInput bordered;
  bordered.stiffness = bordered_identity(constraints.rows, repeated);
  Outcome own = outcome;  // the document's digests key the random vectors; times and work are added below
  auto pencil = PreparedPencil::make(bordered, false, request, context, pool, own);
  if (!pencil.ok()) return pencil.status();
  auto found = pencil->certify(0, false, 0, pool, own);
  if (!found.ok()) return found.status();
  outcome.work.factorizations += found->factorizations;
  outcome.timings.factor += found->seconds;
  outcome.risk = own.risk;
  outcome.events = std::move(own.events);
  rank.backing.level = found->certificate.level;
  if (found->certificate.level == Level::kNone) return rank;
  rank.backing = backing_of(found->certificate);
  // n-([I B^T; B 0]) = rank(B): every zero direction may be one more.
  rank.least = found->inertia.negative;
  rank.most = std::min(distinct, found->inertia.negative + found->inertia.zero);
  return rank;
}

ConstrainedOutcome judge_on_constraints(const Inertia& inertia, const Certificate& certificate,
                                        const ConstraintRank& rank, const std::vector<Index>& original) {
  ConstrainedOutcome outcome;
  outcome.multipliers = rank.multipliers;
  for (const Index equation : rank.repeated) {
    outcome.redundant_equations.push_back(
        (original.empty() ? equation : original[static_cast<std::size_t>(equation)]) + 1);
  }
  if (!rank.bordered) return outcome;
  const Index q = rank.multipliers;
  const Backing of_a = backing_of(certificate);
  const bool rank_known = rank.backing.level != Level::kNone && rank.least == rank.most;
  // A without zero directions has independent constraints, whatever B's own certificate could say.
  const bool independent = of_a.level != Level::kNone && inertia.zero == 0;
  if (rank_known || independent) {
    const bool from_a = independent && (!rank_known || of_a.level > rank.backing.level);
    outcome.rank = from_a ? q : rank.least;
    outcome.redundant = q - *outcome.rank;
    outcome.rank_backing = from_a ? of_a : rank.backing;
  }
  if (of_a.level == Level::kNone) return outcome;
  if (!outcome.rank) {
    outcome.negative_range = {std::max<Index>(0, inertia.negative - q),
                              std::max<Index>(0, inertia.negative - q + inertia.zero)};
    outcome.inertia_backing = of_a;
    return outcome;
  }
  outcome.inertia = on_constraints(inertia, q, *outcome.rank);
  outcome.inertia_backing = independent ? of_a : both(of_a, outcome.rank_backing);
  return outcome;
}

}  // namespace stanchion
