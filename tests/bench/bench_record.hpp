// One repetition of one benchmark run, as a JSON line; every program fills the same fields.
#pragma once

#include <optional>
#include <string>

#include "bench/bench_case.hpp"

namespace stanchion::bench {

struct BenchRecord {
  std::string program;
  std::string ordering;  ///< method, as far as the program says
  Index rows = 0;
  Offset entries = 0;        ///< of the lower triangle of the formed matrix
  double form_seconds = 0;   ///< merging, permuting, scaling, where the program does it apart
  double order_seconds = 0;  ///< 0 where the program does not tell it from the analysis
  double analyse_seconds = 0;
  std::string level = "none", method;  ///< of the certificate; the peers and single factorizations have none
  int factorizations = 1;              ///< that numeric_seconds covers
  double numeric_seconds = 0;
  double numeric_cpu_seconds = 0;  ///< user + system, all threads
  double whole_cpu_seconds = 0;    ///< likewise, of the whole repetition
  double factor_flops = 0;         ///< without relaxation zeros, by the program's own ordering
  Offset factor_entries = 0;       ///< likewise
  Offset stored_entries = 0;       ///< of the factor as laid out, relaxation zeros included
  Offset delayed_pivots = 0;
  Offset negative = 0;
  bool definite = false;
  bool valid = true;  ///< false: stopped, broke down or reported an error
  std::optional<double> error_bound;
  std::optional<Offset> numeric_peak_bytes;  ///< of the numeric phase alone, as the program itself books it
  Offset resident_before = 0;                ///< matrix held, nothing analysed
  Offset highest_resident = 0;               ///< of this repetition
};

/// Prints the record and the arguments as one line on standard output.
void print_record(const BenchArguments& arguments, int repetition, const BenchRecord& record);

}  // namespace stanchion::bench
