// CHOLMOD's supernodal Cholesky on a specimen; one JSON line per repetition, the fields of bench_factor.
#include "base/clock.hpp"
#include "bench/bench_record.hpp"
#include "bench/blas_threads.hpp"
#include "bench/our_order.hpp"
#include "bench/process_usage.hpp"
#include "oracle/cholmod_solver.hpp"

namespace {

using namespace stanchion;
using namespace stanchion::bench;

BenchRecord run_once(const SymmetricMatrix& matrix, const OurOrder& ours) {
  BenchRecord record;
  record.program = "cholmod";
  record.rows = matrix.rows;
  record.entries = matrix.entries();
  reset_highest_resident();
  record.resident_before = resident_bytes();
  const double processor_start = processor_seconds();
  test::CholmodSolver solver(matrix);
  Stopwatch watch;
  const test::PeerStructure structure = solver.analyse(ours.order);
  record.analyse_seconds = watch.seconds();
  record.order_seconds = ours.seconds;
  record.ordering = structure.ordering;
  const double processor_before = processor_seconds();
  watch.restart();
  const test::PeerFactorization f = solver.factor();
  record.numeric_seconds = watch.seconds();
  record.numeric_cpu_seconds = processor_seconds() - processor_before;
  record.factor_flops = structure.factor_flops;
  record.factor_entries = structure.factor_entries;
  record.stored_entries = f.stored_entries;
  record.definite = f.definite;
  record.valid = structure.ok && f.ok && f.definite;
  record.whole_cpu_seconds = processor_seconds() - processor_start + ours.cpu_seconds;
  record.highest_resident = highest_resident_bytes();
  return record;
}

}  // namespace

int main(int argc, char** argv) {
  BenchArguments arguments = read_arguments(argc, argv);
  arguments.definite = arguments.keep = true;  // CHOLMOD knows nothing else
  const SymmetricMatrix matrix = formed(make_case(arguments));
  const OurOrder ours = our_order(matrix, arguments);
  openblas_set_num_threads(arguments.threads);
  for (int repetition = 0; repetition < arguments.repetitions; ++repetition) {
    print_record(arguments, repetition, run_once(matrix, ours));
  }
  return 0;
}
