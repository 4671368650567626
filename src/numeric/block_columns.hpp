// Sums over the columns of a block of eight vectors, by all threads.
#pragma once

#include <array>

#include "base/threads.hpp"
#include "numeric/block_kernels.hpp"

namespace stanchion {

/// A number for each vector of a block.
using ColumnSums = std::array<double, kBlockVectors>;

/// Rows that one thread takes at a time, wherever a block is worked on row by row.
constexpr Offset kBlockRowsAPiece = 4096;

/// Column by column sum of a_i b_i. `a` and `b`: kBlockVectors numbers a row. Summed piece by piece: the same
/// bits for any number of threads.
ColumnSums column_dots(const double* a, const double* b, Offset rows, ThreadPool& pool);

/// Norms of the columns, rounded up by at most 2e-6 of themselves: sums of squares of up to 2^31 terms.
ColumnSums column_norms(const double* block, Offset rows, ThreadPool& pool);

}  // namespace stanchion
