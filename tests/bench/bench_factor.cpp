// Our own engine on a specimen: form, order, analyse, factor once; one JSON line per repetition.
#include <cstdio>
#include <cstdlib>

#include "base/clock.hpp"
#include "base/large_heap.hpp"
#include "bench/bench_record.hpp"
#include "bench/process_usage.hpp"
#include "dense/blas.hpp"
#include "inertia/certify.hpp"
#include "order/weak_diagonal.hpp"
#include "sparse/scaling.hpp"
#include "symbolic/analysis.hpp"

namespace {

using namespace stanchion;
using namespace stanchion::bench;

template <class T>
T take(Result<T> result) {
  if (!result.ok()) {
    std::fprintf(stderr, "%s\n", result.status().to_string().c_str());
    std::exit(1);
  }
  return std::move(*result);
}

/// The union pattern as a matrix, which is what the ordering takes.
SymmetricMatrix union_pattern(const MatrixFamily& family) {
  return {family.rows, family.column_start.clone(), family.row.clone(), family.values[0].clone()};
}

/// One factorization, as every other solver does it.
void factor_once(const Analysis& analysis, const ShiftedMatrix& matrix, const BenchArguments& arguments,
                 ThreadPool& pool, BenchRecord& record) {
  FactorOptions options;
  options.definite = arguments.definite;
  options.keep_factor = arguments.keep;
  const Factorization f = take(factorize(analysis, matrix, options, pool));
  record.delayed_pivots = f.delayed_pivots;
  record.negative = f.signs.negative;
  record.valid = !f.breakdown && !f.stopped;
  record.definite = record.valid && f.signs.positive == analysis.tree.rows;
  record.error_bound = f.error_bound;
  record.numeric_peak_bytes = f.peak_bytes;
}

/// The certified answer, with as many factorizations as it takes and by the method the program would choose.
void certify(const Analysis& analysis, const ShiftedMatrix& matrix, const BenchArguments& arguments,
             ThreadPool& pool, BenchRecord& record) {
  constexpr double kRisk = 1e-6;  // what the program allows a document by default
  constexpr Offset kMostFactor = Offset{8} << 30;
  RiskBudget risk(kRisk);
  CertifyOptions options;
  options.offsets.definite_first = arguments.definite;
  options.risk = &risk;
  options.most_factor_bytes = arguments.least_memory ? 0 : kMostFactor;
  constexpr Offset kEntriesOfVolumes = 30;  // as in engine/prepared_pencil.cpp
  if (matrix.family->entries() >= kEntriesOfVolumes * matrix.family->rows) {
    options.single = SingleUse::kWhereFaster;
  }
  const CertifiedInertia found = take(certify_inertia(analysis, matrix, options, pool));
  record.factorizations = found.factorizations;
  record.delayed_pivots = found.delayed_pivots;
  record.negative = found.inertia.negative;
  record.level = found.certificate.level == Level::kProved ? "proved" : "statistical";
  if (found.certificate.level == Level::kNone) record.level = "none";
  record.method = found.certificate.method.value_or("");
  if (found.certificate.precision == "single") record.method += ", single precision";
  record.valid = found.certificate.level != Level::kNone && found.inertia.zero == 0;
  record.definite = found.inertia.positive == analysis.tree.rows;
  record.error_bound = found.certificate.error_bound;
  record.numeric_peak_bytes = found.peak_bytes;
}

BenchRecord run_once(const BenchCase& bench_case, const BenchArguments& arguments, ThreadPool& pool) {
  // The program's own matrix moves into the family; here the next repetition needs it again.
  SymmetricMatrix only;
  if (bench_case.members.size() == 1) only = bench_case.members[0].clone();
  BenchRecord record;
  record.program = "stanchion";
  record.ordering = "METIS or AMD on groups";
  reset_highest_resident();
  record.resident_before = resident_bytes();
  const double processor_start = processor_seconds();
  Stopwatch watch;
  std::vector<const SymmetricMatrix*> members;
  for (const auto& member : bench_case.members) members.push_back(&member);
  MatrixFamily family = members.size() == 1 ? family_of(std::move(only)) : unite(members, &pool);
  record.rows = family.rows;
  record.entries = family.entries();
  record.form_seconds = watch.seconds();

  Analysis analysis;
  if (members.size() == 1) {
    analysis = take(analyse({members[0], bench_case.node_of, true}, arguments.threads));
  } else {
    const SymmetricMatrix pattern = union_pattern(family);
    const std::vector<char> weak = weak_diagonals(family, bench_case.coefficients);
    analysis =
        take(analyse({&pattern, bench_case.node_of, true, false, nullptr, 1, weak}, arguments.threads));
  }
  record.order_seconds = analysis.order_seconds;
  record.analyse_seconds = analysis.analyse_seconds;

  watch.restart();
  family = permute(family, analysis.tree.position_of, &pool);
  const Buffer<double> scale = take(power_of_two_scaling(family, bench_case.coefficients, &pool));
  record.form_seconds += watch.seconds();

  const ShiftedMatrix matrix{&family, bench_case.coefficients, &scale, 0};
  const double processor_before = processor_seconds();
  watch.restart();
  if (arguments.certified) {
    certify(analysis, matrix, arguments, pool, record);
  } else {
    factor_once(analysis, matrix, arguments, pool, record);
  }
  record.numeric_seconds = watch.seconds();
  record.numeric_cpu_seconds = processor_seconds() - processor_before;
  record.factor_flops = analysis.forecast.factor_flops;
  record.factor_entries = analysis.forecast.factor_entries;
  record.stored_entries = analysis.forecast.stored_factor_entries;
  record.whole_cpu_seconds = processor_seconds() - processor_start;
  record.highest_resident = highest_resident_bytes();
  return record;
}

}  // namespace

bool stanchion::wants_large_heap(int argc, char** argv) {
  constexpr int kWorthBeginningAnew =
      30000;  // equations; from about there the files are as large as the program asks
  return argc > 2 && std::atoi(argv[2]) >= kWorthBeginningAnew;
}

int main(int argc, char** argv) {
  end_blas_threads();  // as the program does
  const BenchArguments arguments = read_arguments(argc, argv);
  const BenchCase bench_case = make_case(arguments);
  ThreadPool pool(arguments.threads);
  for (int repetition = 0; repetition < arguments.repetitions; ++repetition) {
    print_record(arguments, repetition, run_once(bench_case, arguments, pool));
  }
  return 0;
}
