// Sequential MUMPS on a specimen; one JSON line per repetition, the fields of bench_factor.
#include "base/clock.hpp"
#include "bench/bench_record.hpp"
#include "bench/blas_threads.hpp"
#include "bench/our_order.hpp"
#include "bench/process_usage.hpp"
#include "oracle/mumps_solver.hpp"

namespace {

using namespace stanchion;
using namespace stanchion::bench;

BenchRecord run_once(test::MumpsSolver& solver, const OurOrder& ours) {
  BenchRecord record;
  record.program = "mumps";
  reset_highest_resident();
  record.resident_before = resident_bytes();
  const double processor_start = processor_seconds();
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
  record.delayed_pivots = f.delayed_pivots;
  record.negative = f.negative;
  record.definite = f.definite;
  record.valid = structure.ok && f.ok;
  record.whole_cpu_seconds = processor_seconds() - processor_start + ours.cpu_seconds;
  record.highest_resident = highest_resident_bytes();
  return record;
}

}  // namespace

int main(int argc, char** argv) {
  const BenchArguments arguments = read_arguments(argc, argv);
  SymmetricMatrix matrix = formed(make_case(arguments));
  const Index rows = matrix.rows;
  const Offset entries = matrix.entries();
  const OurOrder ours = our_order(matrix, arguments);
  openblas_set_num_threads(arguments.threads);
  test::MumpsSolver solver(matrix, {arguments.definite, !arguments.keep});
  matrix = SymmetricMatrix{};  // MUMPS holds its own triplets
  for (int repetition = 0; repetition < arguments.repetitions; ++repetition) {
    solver.release();
    BenchRecord record = run_once(solver, ours);
    record.rows = rows;
    record.entries = entries;
    print_record(arguments, repetition, record);
  }
  return 0;
}
