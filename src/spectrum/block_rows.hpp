// A sparse symmetric matrix laid out for products with blocks of eight vectors on all threads.
#pragma once

#include "base/threads.hpp"
#include "numeric/block_kernels.hpp"
#include "sparse/matrix_family.hpp"

namespace stanchion {

/// Both triangles by rows, scaled, in plain double; entries that are zero are left out.
class BlockRows {
 public:
  /// Copies the entries of `matrix` (its offset is ignored). Cost: two passes over them, 24 bytes each.
  explicit BlockRows(const ShiftedMatrix& matrix);

  /// out = A in; kBlockVectors doubles a row. Same bits for any number of threads.
  void times(const double* in, double* out, ThreadPool& pool) const;

  Index rows() const { return rows_; }

 private:
  Index rows_ = 0;
  Buffer<Offset> start_;
  Buffer<Index> column_;
  Buffer<double> value_;
};

}  // namespace stanchion
