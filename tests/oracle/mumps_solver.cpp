#include "oracle/mumps_solver.hpp"

#include <dmumps_c.h>

#include <vector>

namespace stanchion::test {
namespace {

constexpr int kWholeWorld = -987654;  // MUMPS's stand-in for MPI_COMM_WORLD

/// Values of ICNTL(7) and INFOG(7).
constexpr int kGiven = 1, kMetis = 5;
const char* ordering_name(int code) {
  constexpr const char* kNames[] = {"AMD", "given", "AMF", "SCOTCH", "PORD", "METIS", "QAMD"};
  return code >= 0 && code < 7 ? kNames[code] : "";
}

/// Counts above 2^31 are given as negative millions.
Offset wide_count(int value) {
  return value >= 0 ? Offset{value} : Offset{-value} * 1'000'000;
}

}  // namespace

struct MumpsSolver::State {
  DMUMPS_STRUC_C mumps{};
  MumpsOptions options;
  bool open = false;
  std::vector<int> row, column, position;
  std::vector<double> value;

  void call(int job) {
    mumps.job = job;
    dmumps_c(&mumps);
  }
  /// The control parameter number `k`, counted from 1 as in the users' guide.
  MUMPS_INT& control(int k) { return mumps.icntl[k - 1]; }
  MUMPS_INT fact(int k) const { return mumps.infog[k - 1]; }

  void close() {
    if (open) call(-2);
    open = false;
  }
};

MumpsSolver::MumpsSolver(const SymmetricMatrix& matrix, const MumpsOptions& options)
    : state_(std::make_unique<State>()) {
  State& s = *state_;
  s.options = options;
  s.mumps.n = matrix.rows;
  s.row.reserve(static_cast<std::size_t>(matrix.entries()));
  s.column.reserve(s.row.capacity());
  for (Index j = 0; j < matrix.rows; ++j) {
    for (Offset k = matrix.column_start[j]; k < matrix.column_start[Offset{j} + 1]; ++k) {
      s.row.push_back(matrix.row[k] + 1);
      s.column.push_back(j + 1);
    }
  }
  s.value.assign(matrix.value.begin(), matrix.value.end());
}

MumpsSolver::~MumpsSolver() {
  release();
}

void MumpsSolver::release() {
  state_->close();
}

PeerStructure MumpsSolver::analyse(std::span<const Index> order) {
  State& s = *state_;
  release();
  const MUMPS_INT n = static_cast<MUMPS_INT>(s.mumps.n);
  s.mumps = DMUMPS_STRUC_C{};
  s.mumps.par = 1;
  s.mumps.sym = s.options.definite ? 1 : 2;
  s.mumps.comm_fortran = kWholeWorld;
  s.call(-1);
  s.open = true;
  for (int stream = 1; stream <= 3; ++stream) s.control(stream) = -1;
  s.control(4) = 0;
  s.control(7) = order.empty() ? kMetis : kGiven;
  s.control(24) = 0;  // no null pivot detection
  s.control(31) = s.options.discard_factors ? 1 : 0;
  s.mumps.n = n;
  s.mumps.nnz = static_cast<MUMPS_INT8>(s.value.size());
  s.mumps.irn = s.row.data();
  s.mumps.jcn = s.column.data();
  s.mumps.a = s.value.data();
  s.position.resize(order.size());
  for (std::size_t k = 0; k < order.size(); ++k) {
    s.position[static_cast<std::size_t>(order[k])] = static_cast<int>(k) + 1;
  }
  s.mumps.perm_in = s.position.data();
  s.call(1);
  return {s.fact(1) >= 0, wide_count(s.fact(20)), s.mumps.rinfog[0], ordering_name(s.fact(7))};
}

PeerFactorization MumpsSolver::factor() {
  State& s = *state_;
  constexpr int kWorkspaceTooSmallInteger = -8, kWorkspaceTooSmall = -9;
  for (int attempt = 0; attempt < 6; ++attempt) {
    s.call(2);
    if (s.fact(1) != kWorkspaceTooSmall && s.fact(1) != kWorkspaceTooSmallInteger) break;
    s.control(14) = 2 * s.control(14) + 20;
  }
  PeerFactorization result;
  result.error_code = s.fact(1);
  result.ok = s.fact(1) >= 0;
  result.negative = s.fact(12);
  result.definite = result.ok && result.negative == 0;
  result.delayed_pivots = s.fact(13);
  result.stored_entries = wide_count(s.fact(9));
  return result;
}

}  // namespace stanchion::test
