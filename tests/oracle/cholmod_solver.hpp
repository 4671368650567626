// CHOLMOD's supernodal Cholesky behind names of ours: an oracle for definite matrices.
#pragma once

#include <memory>
#include <span>

#include "oracle/peer_result.hpp"
#include "sparse/symmetric_matrix.hpp"

namespace stanchion::test {

/// One matrix, analysed and factored by CHOLMOD (32-bit indices). Not thread safe.
class CholmodSolver {
 public:
  /// Reads `matrix` in place; it must outlive the solver. At most 2^31 - 1 entries.
  explicit CholmodSolver(const SymmetricMatrix& matrix);
  ~CholmodSolver();
  CholmodSolver(const CholmodSolver&) = delete;
  CholmodSolver& operator=(const CholmodSolver&) = delete;

  /// Nested dissection by METIS, or `order` (equation eliminated k-th) when it is not empty.
  PeerStructure analyse(std::span<const Index> order = {});

  /// Supernodal L L^T; `definite` false when it met a pivot that is not positive. After analyse().
  PeerFactorization factor();

 private:
  struct State;
  std::unique_ptr<State> state_;
};

}  // namespace stanchion::test
