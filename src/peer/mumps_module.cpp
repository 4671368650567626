// Sequential MUMPS behind the interface of library_count.h. The only file that includes it.
#include <dmumps_c.h>

#include <cstdio>

#include "peer/library_count.h"

namespace {

constexpr int kWholeWorld = -987654;  // MUMPS's stand-in for MPI_COMM_WORLD
constexpr int kIndefinite = 2, kMetis = 5;
constexpr int kWorkspaceTooSmallInteger = -8, kWorkspaceTooSmall = -9, kSingular = -10;
constexpr int kMostAttempts = 6;

/// One instance, ended whatever happens.
class Instance {
 public:
  explicit Instance(const StanchionPeerMatrix& matrix) {
    mumps_.par = 1;
    mumps_.sym = kIndefinite;
    mumps_.comm_fortran = kWholeWorld;
    call(-1);
    for (int stream = 1; stream <= 4; ++stream) control(stream) = stream < 4 ? -1 : 0;
    control(7) = kMetis;
    control(13) = 1;  // no root apart: every pivot is counted
    control(23) = matrix.most_megabytes;
    control(24) = 0;  // null pivots are not set aside
    control(31) = 1;  // factors are thrown away
    mumps_.n = matrix.rows;
    mumps_.nnz = matrix.entries;
    mumps_.irn = matrix.row;
    mumps_.jcn = matrix.column;
    mumps_.a = matrix.value;
  }
  ~Instance() { call(-2); }
  Instance(const Instance&) = delete;
  Instance& operator=(const Instance&) = delete;

  /// Its error number, 0 for none.
  int factor() {
    call(1);
    for (int attempt = 0; error() == 0 && attempt < kMostAttempts; ++attempt) {
      call(2);
      if (error() != kWorkspaceTooSmall && error() != kWorkspaceTooSmallInteger) return error();
      control(14) = 2 * control(14) + 20;
      mumps_.infog[0] = 0;
    }
    return error() != 0 ? error() : kWorkspaceTooSmall;
  }
  int negative() const { return mumps_.infog[11]; }

 private:
  void call(int job) {
    mumps_.job = job;
    dmumps_c(&mumps_);
  }
  /// Control parameter `k`, counted from 1 as in the users' guide.
  MUMPS_INT& control(int k) { return mumps_.icntl[k - 1]; }
  int error() const { return mumps_.infog[0] < 0 ? mumps_.infog[0] : 0; }

  DMUMPS_STRUC_C mumps_{};
};

void count_negative(const StanchionPeerMatrix* matrix, StanchionPeerAnswer* answer) {
  Instance instance(*matrix);
  answer->error = instance.factor();
  answer->negative = answer->error == 0 ? instance.negative() : 0;
  answer->message[0] = 0;
  if (answer->error == kSingular) {
    std::snprintf(answer->message, sizeof(answer->message), "it finds the matrix singular");
  } else if (answer->error != 0) {
    std::snprintf(answer->message, sizeof(answer->message), "its error number is %d", answer->error);
  }
}

const StanchionPeer kPeer{STANCHION_PEER_INTERFACE, "MUMPS", MUMPS_VERSION, count_negative};

}  // namespace

const StanchionPeer* stanchion_peer(void) {
  return &kPeer;
}
