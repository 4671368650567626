// Everything that depends on the pattern alone: made once, used for every shift and every matrix of the
// pattern.
#pragma once

#include "order/ordering.hpp"
#include "symbolic/assembly_tree.hpp"
#include "symbolic/schedule.hpp"

namespace stanchion {

/// Sizes known before anything is factored.
struct StructureForecast {
  Offset factor_entries = 0;         ///< of L, diagonal included, without relaxation zeros
  double factor_flops = 0;           ///< without relaxation zeros
  double front_flops = 0;            ///< as executed, relaxation zeros included
  Offset stored_factor_entries = 0;  ///< as kept in solve mode, relaxation zeros included
  Index largest_front = 0;
  Offset peak_bytes_count = 0;   ///< numeric phase, factor discarded
  Offset peak_bytes_solve = 0;   ///< numeric phase, factor kept, and passes over it with blocks of vectors
  Offset peak_bytes_single = 0;  ///< the same in single precision, the vectors in double
};

struct Analysis {
  AssemblyTree tree;
  Schedule schedule;
  StructureForecast forecast;
  double order_seconds = 0, analyse_seconds = 0;
  bool known_order = false;  ///< the elimination order was found before, see OrderingInput
};

/// What the numeric phase holds at most, for another number of workers than the analysis was made for, at
/// most as many.
struct PeakBytes {
  Offset count = 0, solve = 0, single = 0;  ///< see StructureForecast
};
PeakBytes peak_bytes(const Analysis& analysis, int workers);

/// Orders, counts, amalgamates and schedules. Errors: those of order_equations. Reproducible; the tree does
/// not depend on `workers`, only the schedule does.
Result<Analysis> analyse(const OrderingInput& input, int workers);

}  // namespace stanchion
