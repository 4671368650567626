// What can be seen on a matrix before anything is factored.
#pragma once

#include <string>
#include <vector>

#include "io/dof_map.hpp"
#include "io/read_matrix.hpp"
#include "sparse/symmetric_matrix.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// The matrix under inspection. Pointees outlive the call; `dofs`, `multipliers` and
/// `original` may be null; the first two are numbered like `matrix`.
struct PreflightSubject {
  const SymmetricMatrix& matrix;
  std::string path;
  MatrixRole role = MatrixRole::kStiffness;
  const DofMap* dofs = nullptr;                     ///< names nodes and dofs in the findings
  const std::vector<Index>* multipliers = nullptr;  ///< equations whose diagonal is rightly zero
  const std::vector<Index>* original = nullptr;     ///< of a struck matrix: equation numbers in the file
};

/// Counts behind the findings.
struct PreflightFacts {
  Offset empty_rows = 0, zero_diagonals = 0, negative_diagonals = 0, identity_rows = 0;
  double least_diagonal = 0, greatest_diagonal = 0;  ///< of the positive ones; 0 when there are none
  Index parts = 0;                                   ///< connected parts, without empty and identity rows
  Offset positive_diagonals = 0;
  double median_diagonal = 0;  ///< of the absolute values that are not zero
};

struct Preflight {
  PreflightFacts facts;
  Warnings warnings;  ///< at most one a kind, with the first few places and the count of the rest
};

/// Findings, each with its remedy in the message: "empty-rows", "zero-diagonal", "negative-diagonal",
/// "identity-rows", "stamped-rows", "penalty-rows", "diagonal-spread", "disconnected-parts", "units-by-part",
/// "sign-of-stiffness". A second matrix may rightly be empty or negative
/// in places: for it only what cannot be meant is reported. Cost: three passes over the entries, serial.
/// With `dofs` the dofs of one node count as connected.
Result<Preflight> preflight(const PreflightSubject& subject);

/// What two matrices say together: "swapped-matrices", "sign-of-geometric". `minus`: G was written for K - f
/// G.
Warnings compare_matrices(const PreflightFacts& stiffness, const std::string& stiffness_path,
                          const PreflightFacts& second, const std::string& second_path, MatrixRole role,
                          bool minus);

/// kBadInput "dof-map-size" unless the map has exactly one line an equation.
Status check_dof_map_size(const DofMap& dofs, const std::string& dofs_path, const SymmetricMatrix& matrix,
                          const std::string& matrix_path);

}  // namespace stanchion
