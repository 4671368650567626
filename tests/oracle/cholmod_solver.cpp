#include "oracle/cholmod_solver.hpp"

#include <cholmod.h>

#include <vector>

namespace stanchion::test {

struct CholmodSolver::State {
  cholmod_common common{};
  cholmod_sparse matrix{};
  cholmod_factor* factor = nullptr;
  std::vector<int> column_start;  ///< 32-bit copy
};

CholmodSolver::CholmodSolver(const SymmetricMatrix& matrix) : state_(std::make_unique<State>()) {
  State& s = *state_;
  cholmod_start(&s.common);
  s.common.supernodal = CHOLMOD_SUPERNODAL;
  s.common.print = 0;
  s.common.nmethods = 1;
  s.common.method[0].ordering = CHOLMOD_METIS;
  s.column_start.assign(matrix.column_start.begin(), matrix.column_start.end());
  s.matrix.nrow = s.matrix.ncol = static_cast<std::size_t>(matrix.rows);
  s.matrix.nzmax = static_cast<std::size_t>(matrix.entries());
  s.matrix.p = s.column_start.data();
  // CHOLMOD's interface takes pointers to data it does not write.
  s.matrix.i = const_cast<Index*>(matrix.row.data());
  s.matrix.x = const_cast<double*>(matrix.value.data());
  s.matrix.stype = -1;
  s.matrix.itype = CHOLMOD_INT;
  s.matrix.xtype = CHOLMOD_REAL;
  s.matrix.dtype = CHOLMOD_DOUBLE;
  s.matrix.sorted = 1;
  s.matrix.packed = 1;
}

CholmodSolver::~CholmodSolver() {
  cholmod_free_factor(&state_->factor, &state_->common);
  cholmod_finish(&state_->common);
}

PeerStructure CholmodSolver::analyse(std::span<const Index> order) {
  State& s = *state_;
  cholmod_free_factor(&s.factor, &s.common);
  if (order.empty()) {
    s.common.method[0].ordering = CHOLMOD_METIS;
    s.factor = cholmod_analyze(&s.matrix, &s.common);
  } else {
    std::vector<int> permutation(order.begin(), order.end());
    s.common.method[0].ordering = CHOLMOD_GIVEN;
    s.factor = cholmod_analyze_p(&s.matrix, permutation.data(), nullptr, 0, &s.common);
  }
  return {s.factor != nullptr && s.common.status == CHOLMOD_OK, static_cast<Offset>(s.common.lnz),
          s.common.fl, order.empty() ? "METIS" : "given"};
}

PeerFactorization CholmodSolver::factor() {
  State& s = *state_;
  PeerFactorization result;
  const int done = cholmod_factorize(&s.matrix, s.factor, &s.common);
  result.error_code = s.common.status;
  result.ok = done != 0 && (s.common.status == CHOLMOD_OK || s.common.status == CHOLMOD_NOT_POSDEF);
  result.definite = result.ok && s.common.status == CHOLMOD_OK && s.factor->minor == s.factor->n;
  result.stored_entries = static_cast<Offset>(s.factor->xsize);
  return result;
}

}  // namespace stanchion::test
