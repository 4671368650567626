#include "bench/bench_record.hpp"

#include <cstdio>
#include <nlohmann/json.hpp>

#include "dense/blas.hpp"

namespace stanchion::bench {

void print_record(const BenchArguments& arguments, int repetition, const BenchRecord& record) {
  nlohmann::ordered_json line;
  line["program"] = record.program;
  line["ordering"] = record.ordering;
  line["model"] = arguments.model;
  line["rows"] = record.rows;
  line["entries"] = record.entries;
  line["mode"] = arguments.definite ? "definite" : "indefinite";
  line["pencil"] = arguments.pencil;
  line["shift"] = arguments.shift;
  line["factor_kept"] = arguments.keep;
  line["least_memory"] = arguments.least_memory;
  line["node_map"] = arguments.node_map;
  line["our_order"] = arguments.our_order;
  line["threads"] = arguments.threads;
  line["blas"] = blas_description();
  line["repetition"] = repetition;
  line["form_seconds"] = record.form_seconds;
  line["order_seconds"] = record.order_seconds;
  line["analyse_seconds"] = record.analyse_seconds;
  line["certified"] = arguments.certified;
  line["level"] = record.level;
  line["method"] = record.method;
  line["factorizations"] = record.factorizations;
  line["numeric_seconds"] = record.numeric_seconds;
  line["numeric_cpu_seconds"] = record.numeric_cpu_seconds;
  line["whole_cpu_seconds"] = record.whole_cpu_seconds;
  line["factor_flops"] = record.factor_flops;
  line["gflops"] = record.factorizations * record.factor_flops / record.numeric_seconds * 1e-9;
  line["factor_entries"] = record.factor_entries;
  line["stored_entries"] = record.stored_entries;
  line["delayed_pivots"] = record.delayed_pivots;
  line["negative"] = record.negative;
  line["definite"] = record.definite;
  line["valid"] = record.valid;
  if (record.error_bound) line["error_bound"] = *record.error_bound;
  if (record.numeric_peak_bytes) line["numeric_peak_bytes"] = *record.numeric_peak_bytes;
  line["highest_resident_bytes"] = record.highest_resident;
  line["increase_over_matrix_bytes"] = record.highest_resident - record.resident_before;
  std::printf("%s\n", line.dump().c_str());
  std::fflush(stdout);
}

}  // namespace stanchion::bench
