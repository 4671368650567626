// A real symmetric sparse matrix, held as its lower triangle by columns.
#pragma once

#include <vector>

#include "base/buffer.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

/// Lower triangle in compressed columns. Invariants (the readers establish them, see check_invariants):
/// within a column the rows ascend strictly, every row >= its column, every value is finite.
/// A diagonal entry may be absent (it is then zero); explicit zeros are allowed.
///
/// Example, [4 1 0; 1 5 2; 0 2 6]: column_start = 0 2 4 5, row = 0 1 1 2 2, value = 4 1 5 2 6.
struct SymmetricMatrix {
  Index rows = 0;
  Buffer<Offset> column_start;  ///< rows + 1 offsets
  Buffer<Index> row;            ///< column_start[rows] row numbers
  Buffer<double> value;         ///< same length

  Offset entries() const { return row.size(); }
  SymmetricMatrix clone() const { return {rows, column_start.clone(), row.clone(), value.clone()}; }
};

/// True when the invariants above hold. Cost: one pass.
bool check_invariants(const SymmetricMatrix& matrix);

/// One entry of either triangle.
struct Triplet {
  Index row, column;
  double value;
};

/// Lower triangle of the symmetric matrix whose entries are `triplets` (either triangle, any order; entries
/// of the same place are summed in the order given). For tests and generated models; files go through io/.
SymmetricMatrix from_triplets(Index rows, const std::vector<Triplet>& triplets);

}  // namespace stanchion
