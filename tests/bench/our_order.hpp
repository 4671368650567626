// Our elimination order for a solver that takes one.
#pragma once

#include <cstdio>
#include <cstdlib>
#include <vector>

#include "bench/bench_case.hpp"
#include "bench/process_usage.hpp"
#include "symbolic/analysis.hpp"

namespace stanchion::bench {

struct OurOrder {
  std::vector<Index> order;             ///< equation eliminated k-th; empty unless asked for
  double seconds = 0, cpu_seconds = 0;  ///< that finding it took
};

inline OurOrder our_order(const SymmetricMatrix& matrix, const BenchArguments& arguments) {
  if (!arguments.our_order) return {};
  const double processor_before = processor_seconds();
  const auto analysis = analyse({&matrix, {}, true}, arguments.threads);
  if (!analysis.ok()) {
    std::fprintf(stderr, "%s\n", analysis.status().to_string().c_str());
    std::exit(1);
  }
  return {{analysis->tree.equation_at.begin(), analysis->tree.equation_at.end()},
          analysis->order_seconds,
          processor_seconds() - processor_before};
}

}  // namespace stanchion::bench
