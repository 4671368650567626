// Taking equations out of a matrix: fixed and held dofs.
#pragma once

#include <vector>

#include "base/threads.hpp"
#include "sparse/symmetric_matrix.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// Which equations stay, and under which number. One map serves every matrix of a pencil.
/// Example: 4 rows, equation 1 struck: original = 0 2 3, reduced = 0 -1 1 2.
struct EquationMap {
  std::vector<Index> original;  ///< of each equation that stays
  std::vector<Index> reduced;   ///< of each original equation, -1 when struck

  Index rows() const { return static_cast<Index>(original.size()); }
  Index struck() const { return static_cast<Index>(reduced.size() - original.size()); }
};

/// Map of `rows` equations without those in `remove` (from 0, any order, repetitions allowed).
/// Errors: kInternal when one is out of range; kBadInput "nothing-left" when no equation stays.
Result<EquationMap> strike_map(Index rows, const std::vector<Index>& remove);

/// `matrix` without the rows and columns that `map` strikes. Cost: two passes.
/// Errors: kInternal when the sizes differ; "out-of-memory".
Result<SymmetricMatrix> strike(const SymmetricMatrix& matrix, const EquationMap& map, ThreadPool& pool);

/// Those of `equations` that stay, in the new numbering (for multipliers).
std::vector<Index> renumber(const std::vector<Index>& equations, const EquationMap& map);

/// Equations whose row holds nothing but a diagonal 1 (zeros stored off the diagonal count as nothing):
/// held dofs that the exporting program stamped as identity. Ascending.
std::vector<Index> identity_rows(const SymmetricMatrix& matrix);

}  // namespace stanchion
