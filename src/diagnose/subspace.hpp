// Products, orthogonalisation and Rayleigh-Ritz projection on a few vectors, part by part.
#pragma once

#include <span>
#include <vector>

#include "base/threads.hpp"
#include "diagnose/columns.hpp"
#include "sparse/matrix_family.hpp"

namespace stanchion {

/// y = A x in double precision, for shapes and iterations; what is judged goes through extended_product.
/// Columns before `from`, a multiple of eight, are left zero. `y` takes the size of `x`; memory that it has
/// is used again. Eight columns are one thread's work.
void multiply(const ShiftedMatrix& matrix, const Columns& x, Columns& y, ThreadPool& pool, Index from = 0);
Columns times(const ShiftedMatrix& matrix, const Columns& x, ThreadPool& pool, Index from = 0);

/// y = A x accumulated in double-double and rounded once.
void multiply_extended(const ShiftedMatrix& matrix, const Columns& x, Columns& y, ThreadPool& pool);
Columns times_extended(const ShiftedMatrix& matrix, const Columns& x, ThreadPool& pool);

/// Rows of each group, for work that keeps to one part of the structure.
using RowGroup = std::span<const Index>;

/// Gram-Schmidt by blocks, twice, over the rows of `group` only. Columns that depend on earlier ones are
/// dropped; what is left moves to the front, the rest of the group's rows becomes zero. Returns how many are
/// left. `scratch` has room for the group's rows of all columns.
Index orthonormalise(Columns& x, RowGroup group, double* scratch);
Index orthonormalise(Columns& x, RowGroup group);

/// Ritz values of orthonormal columns x[0..used) with ax = A x over a group; the columns (and ax) are
/// replaced by the Ritz vectors, ascending in |value| (or in value), and the residual norms ||A x - value x||
/// come along. Only the first `keep` pairs are formed where it is not negative; the other columns become
/// zero.
struct Ritz {
  std::vector<double> value, residual;
};
Ritz project(Columns& x, Columns& ax, RowGroup group, Index used, bool by_size, Index keep = -1);

}  // namespace stanchion
