#include "sparse/matrix_family.hpp"

#include <algorithm>
#include <cmath>
#include <utility>

namespace stanchion {
namespace {

/// Walks column `j` of every member and the diagonal in ascending row order; visit(row, member or -1, value).
template <class Visit>
void merge_column(std::span<const SymmetricMatrix* const> members, Index j, std::vector<Offset>& at,
                  const Visit& visit) {
  for (std::size_t t = 0; t < members.size(); ++t) at[t] = members[t]->column_start[j];
  Index next = j;  // the diagonal is always present
  for (;;) {
    for (std::size_t t = 0; t < members.size(); ++t) {
      const Offset end = members[t]->column_start[Offset{j} + 1];
      if (at[t] < end && members[t]->row[at[t]] == next) visit(next, t, members[t]->value[at[t]++]);
    }
    Index following = members[0]->rows;
    for (std::size_t t = 0; t < members.size(); ++t) {
      if (at[t] < members[t]->column_start[Offset{j} + 1])
        following = std::min(following, members[t]->row[at[t]]);
    }
    if (following == members[0]->rows) return;
    next = following;
  }
}

bool starts_with_diagonal(const SymmetricMatrix& matrix, Index j) {
  const Offset begin = matrix.column_start[j];
  return begin < matrix.column_start[Offset{j} + 1] && matrix.row[begin] == j;
}

/// One matrix some of whose columns may have no diagonal yet; columns go over whole.
MatrixFamily copy_with_diagonals(const SymmetricMatrix& matrix) {
  const Index n = matrix.rows;
  MatrixFamily family;
  family.rows = n;
  family.column_start = Buffer<Offset>(Offset{n} + 1);
  family.column_start[0] = 0;
  for (Index j = 0; j < n; ++j) {
    const Offset entries = matrix.column_start[Offset{j} + 1] - matrix.column_start[j];
    family.column_start[Offset{j} + 1] =
        family.column_start[j] + entries + (starts_with_diagonal(matrix, j) ? 0 : 1);
  }
  family.row = Buffer<Index>(family.column_start[n]);
  family.values.emplace_back(family.column_start[n]);
  for (Index j = 0; j < n; ++j) {
    const Offset begin = matrix.column_start[j], count = matrix.column_start[Offset{j} + 1] - begin;
    Offset place = family.column_start[j];
    if (!starts_with_diagonal(matrix, j)) {
      family.row[place] = j;
      family.values[0][place++] = 0;
    }
    std::copy_n(matrix.row.data() + begin, count, family.row.data() + place);
    std::copy_n(matrix.value.data() + begin, count, family.values[0].data() + place);
  }
  return family;
}

/// Entries counted by column become where each column starts.
void sum_up(Buffer<Offset>& column_start) {
  for (Offset j = 1; j < column_start.size(); ++j) column_start[j] += column_start[j - 1];
}

}  // namespace

int column_ranges(ThreadPool* pool, Offset entries) {
  constexpr Offset kWorthThreads = 200'000;
  return pool == nullptr || entries < kWorthThreads ? 1 : pool->size();
}

MatrixFamily family_of(SymmetricMatrix matrix) {
  for (Index j = 0; j < matrix.rows; ++j) {
    if (!starts_with_diagonal(matrix, j)) return copy_with_diagonals(matrix);
  }
  MatrixFamily family{matrix.rows, std::move(matrix.column_start), std::move(matrix.row), {}};
  family.values.push_back(std::move(matrix.value));
  return family;
}

MatrixFamily unite(std::span<const SymmetricMatrix* const> members, ThreadPool* pool) {
  if (members.size() == 1) return copy_with_diagonals(*members[0]);
  const Index n = members[0]->rows;
  MatrixFamily family;
  family.rows = n;
  family.column_start = Buffer<Offset>(Offset{n} + 1);
  family.column_start[0] = 0;
  const SymmetricMatrix& first_member = *members[0];
  const int pieces = column_ranges(pool, first_member.column_start[n]);
  for_column_ranges(pool, n, first_member.column_start, pieces, [&](Index first, Index last, int) {
    std::vector<Offset> at(members.size());
    for (Index j = first; j < last; ++j) {
      Offset count = 1;
      Index before = j;
      merge_column(members, j, at, [&](Index row, std::size_t, double) {
        count += row != before;
        before = row;
      });
      family.column_start[Offset{j} + 1] = count;
    }
  });
  sum_up(family.column_start);
  const Offset entries = family.column_start[n];
  family.row = Buffer<Index>(entries);
  for (std::size_t t = 0; t < members.size(); ++t) family.values.emplace_back(entries);
  for_column_ranges(pool, n, first_member.column_start, pieces, [&](Index first, Index last, int) {
    std::vector<Offset> at(members.size());
    for (auto& values : family.values) {
      std::fill(values.begin() + family.column_start[first], values.begin() + family.column_start[last], 0.0);
    }
    for (Index j = first; j < last; ++j) {
      Offset place = family.column_start[j];
      family.row[place] = j;
      merge_column(members, j, at, [&](Index row, std::size_t t, double value) {
        if (row != family.row[place]) family.row[++place] = row;
        family.values[t][place] = value;
      });
    }
  });
  return family;
}

MatrixFamily permute(const MatrixFamily& family, const Buffer<Index>& position_of, ThreadPool* pool) {
  const Index n = family.rows;
  MatrixFamily result;
  result.rows = n;
  result.column_start = Buffer<Offset>(Offset{n} + 1, 0);
  const int pieces = column_ranges(pool, family.entries());
  const auto each_entry = [&](Index first, Index last, const auto& visit) {
    for (Index j = first; j < last; ++j) {
      const Index pj = position_of[j];
      for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
        const Index pi = position_of[family.row[k]];
        visit(k, std::max(pi, pj), std::min(pi, pj));
      }
    }
  };
  // How many entries of a column come from each range; then where in the column each range's entries begin.
  std::vector<Buffer<Index>> from(static_cast<std::size_t>(pieces));
  for_column_ranges(pool, n, family.column_start, pieces, [&](Index first, Index last, int piece) {
    Buffer<Index>& count = from[static_cast<std::size_t>(piece)];
    count = Buffer<Index>(n, 0);
    each_entry(first, last, [&](Offset, Index, Index column) { ++count[column]; });
  });
  for (Index j = 0; j < n; ++j) {
    Index in_column = 0;
    for (auto& count : from) in_column += std::exchange(count[j], in_column);
    result.column_start[Offset{j} + 1] = result.column_start[j] + in_column;
  }
  result.row = Buffer<Index>(family.entries());
  for (std::size_t t = 0; t < family.values.size(); ++t) result.values.emplace_back(family.entries());
  for_column_ranges(pool, n, family.column_start, pieces, [&](Index first, Index last, int piece) {
    Buffer<Index>& next = from[static_cast<std::size_t>(piece)];
    each_entry(first, last, [&](Offset k, Index row, Index column) {
      const Offset place = result.column_start[column] + next[column]++;
      result.row[place] = row;
      for (std::size_t t = 0; t < family.values.size(); ++t) result.values[t][place] = family.values[t][k];
    });
  });
  return result;
}

double ShiftedMatrix::entry_error(Offset k, Index row, Index column) const {
  constexpr double kUnit = 0x1p-53, kTiny = 0x1p-1074;
  if (exact()) return kExactError;
  const double scaling = (*scale)[row] * (*scale)[column];
  // Scaled before it is multiplied by gamma, which could make it vanish.
  double magnitude = 0;
  for (std::size_t t = 0; t < coefficients.size(); ++t) {
    magnitude += std::fabs(coefficients[t] * family->values[t][k]) * scaling;
  }
  // One product and at most (members - 1) additions a term; the scale is a power of two. A product among
  // subnormal numbers loses up to half of the least of them, and the scale may make that large; sums of such
  // numbers are exact.
  const auto roundings = static_cast<double>(coefficients.size() + 1);
  return roundings * kUnit * magnitude + roundings * kTiny * (1 + scaling);
}

}  // namespace stanchion
