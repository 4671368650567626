// Sequential MUMPS behind names of ours: an oracle for the inertia of indefinite matrices.
#pragma once

#include <memory>
#include <span>

#include "oracle/peer_result.hpp"
#include "sparse/symmetric_matrix.hpp"

namespace stanchion::test {

struct MumpsOptions {
  bool definite = false;         ///< SYM = 1, no pivoting; otherwise SYM = 2, threshold pivoting
  bool discard_factors = false;  ///< ICNTL(31) = 1
};

/// One matrix, analysed and factored by MUMPS with METIS and no null pivot detection: every pivot is counted
/// as negative or positive. Other controls at their defaults. Not thread safe, as MUMPS is not.
class MumpsSolver {
 public:
  /// Copies `matrix` into MUMPS's triplets.
  MumpsSolver(const SymmetricMatrix& matrix, const MumpsOptions& options);
  ~MumpsSolver();
  MumpsSolver(const MumpsSolver&) = delete;
  MumpsSolver& operator=(const MumpsSolver&) = delete;

  /// Forgets the earlier analysis and makes it again, with `order` (equation eliminated k-th) or, when that
  /// is empty, with METIS. A MUMPS that was built without METIS takes its own default instead: see the
  /// result.
  PeerStructure analyse(std::span<const Index> order = {});

  /// Frees everything but the triplets.
  void release();

  /// After analyse(). Doubles its workspace and tries again when MUMPS's own estimate was too small.
  PeerFactorization factor();

 private:
  struct State;
  std::unique_ptr<State> state_;
};

}  // namespace stanchion::test
