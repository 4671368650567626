// Which of many sparse columns follow from others, and how.
#pragma once

#include <vector>

#include "stanchion/types.hpp"

namespace stanchion {

struct SparseEntry {
  Index at = 0;
  double value = 0;
};
using SparseColumn = std::vector<SparseEntry>;

/// Of a search for dependence: some tenths of a second.
constexpr Offset kMostDependenceSteps = 100'000'000;

/// For every column that follows from earlier ones, to 2^-40 of what cancels, the coefficients of a
/// combination that is zero: by column number, ascending, the dependent column with 1. Columns are of about
/// unit length, in rows [0, rows). Elimination column by column with partial pivoting (Gilbert and Peierls,
/// SIAM J. Sci. Stat. Comput. 9 (1988)); ends early, with what was found, after `most_steps` multiplications.
/// Reproducible. A combination is a proposal: whoever uses it holds it against the columns.
std::vector<SparseColumn> dependent_columns(const std::vector<SparseColumn>& columns, Index rows,
                                            Offset most_steps);

}  // namespace stanchion
