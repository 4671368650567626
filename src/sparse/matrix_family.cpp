#include "sparse/matrix_family.hpp"

#include <algorithm>
#include <cmath>

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

/// One matrix whose columns have their diagonals already, or get them: columns go over whole.
MatrixFamily family_of(const SymmetricMatrix& matrix) {
  const Index n = matrix.rows;
  const auto starts_with_diagonal = [&](Index j) {
    const Offset begin = matrix.column_start[j];
    return begin < matrix.column_start[Offset{j} + 1] && matrix.row[begin] == j;
  };
  MatrixFamily family;
  family.rows = n;
  family.column_start = Buffer<Offset>(Offset{n} + 1);
  family.column_start[0] = 0;
  for (Index j = 0; j < n; ++j) {
    const Offset entries = matrix.column_start[Offset{j} + 1] - matrix.column_start[j];
    family.column_start[Offset{j} + 1] = family.column_start[j] + entries + (starts_with_diagonal(j) ? 0 : 1);
  }
  family.row = Buffer<Index>(family.column_start[n]);
  family.values.emplace_back(family.column_start[n]);
  for (Index j = 0; j < n; ++j) {
    const Offset begin = matrix.column_start[j], count = matrix.column_start[Offset{j} + 1] - begin;
    Offset place = family.column_start[j];
    if (!starts_with_diagonal(j)) {
      family.row[place] = j;
      family.values[0][place++] = 0;
    }
    std::copy_n(matrix.row.data() + begin, count, family.row.data() + place);
    std::copy_n(matrix.value.data() + begin, count, family.values[0].data() + place);
  }
  return family;
}

}  // namespace

MatrixFamily unite(std::span<const SymmetricMatrix* const> members) {
  if (members.size() == 1) return family_of(*members[0]);
  const Index n = members[0]->rows;
  MatrixFamily family;
  family.rows = n;
  family.column_start = Buffer<Offset>(Offset{n} + 1);
  std::vector<Offset> at(members.size());
  family.column_start[0] = 0;
  for (Index j = 0; j < n; ++j) {
    Offset count = 1;
    Index last = j;
    merge_column(members, j, at, [&](Index row, std::size_t, double) {
      count += row != last;
      last = row;
    });
    family.column_start[Offset{j} + 1] = family.column_start[j] + count;
  }
  const Offset entries = family.column_start[n];
  family.row = Buffer<Index>(entries);
  for (std::size_t t = 0; t < members.size(); ++t) family.values.emplace_back(entries, 0.0);
  for (Index j = 0; j < n; ++j) {
    Offset place = family.column_start[j];
    family.row[place] = j;
    merge_column(members, j, at, [&](Index row, std::size_t t, double value) {
      if (row != family.row[place]) family.row[++place] = row;
      family.values[t][place] = value;
    });
  }
  return family;
}

MatrixFamily permute(const MatrixFamily& family, const Buffer<Index>& position_of) {
  const Index n = family.rows;
  MatrixFamily result;
  result.rows = n;
  result.column_start = Buffer<Offset>(Offset{n} + 1, 0);
  const auto each_entry = [&](const auto& visit) {
    for (Index j = 0; j < n; ++j) {
      const Index pj = position_of[j];
      for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
        const Index pi = position_of[family.row[k]];
        visit(k, std::max(pi, pj), std::min(pi, pj));
      }
    }
  };
  each_entry([&](Offset, Index, Index column) { ++result.column_start[Offset{column} + 1]; });
  for (Index j = 0; j < n; ++j) result.column_start[Offset{j} + 1] += result.column_start[j];
  result.row = Buffer<Index>(family.entries());
  for (std::size_t t = 0; t < family.values.size(); ++t) result.values.emplace_back(family.entries());
  Buffer<Offset> next = result.column_start.clone();
  each_entry([&](Offset k, Index row, Index column) {
    const Offset place = next[column]++;
    result.row[place] = row;
    for (std::size_t t = 0; t < family.values.size(); ++t) result.values[t][place] = family.values[t][k];
  });
  return result;
}

double ShiftedMatrix::entry_error(Offset k, Index row, Index column) const {
  constexpr double kUnit = 0x1p-53, kTiny = 0x1p-1074;
  if (exact()) return kTiny;
  double magnitude = 0;
  for (std::size_t t = 0; t < coefficients.size(); ++t) {
    magnitude += std::fabs(coefficients[t] * family->values[t][k]);
  }
  // One product and at most (members - 1) additions a term; the scale is a power of two.
  const double gamma = static_cast<double>(coefficients.size() + 1) * kUnit;
  return gamma * magnitude * ((*scale)[row] * (*scale)[column]) +
         static_cast<double>(coefficients.size() + 1) * kTiny;
}

}  // namespace stanchion
