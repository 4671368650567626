// Does this machine compute as the proofs assume? Rounding, denormals, fused operations, dense products,
// kernels.
#pragma once

#include <string>
#include <vector>

#include "stanchion/status.hpp"

namespace stanchion {

enum class SelftestLevel {
  kQuick,  ///< under 30 ms: for the start of a long job
  kFull,   ///< every shape: about a second
};

/// One property that was tried.
struct SelftestLine {
  std::string what;    ///< in words
  std::string wrong;   ///< empty: as assumed; otherwise what came out and what is right
  std::string remedy;  ///< when wrong
  double seconds = 0;
  bool ok() const { return wrong.empty(); }
};

/// Tries everything of `level` on the calling thread, in a fixed order, whatever comes out wrong. Dense
/// products of small integers are exact in any order of summation, so any deviation is an error of the
/// library; products of random numbers are held against their proved bound. Thread safe; reproducible. Throws
/// std::bad_alloc.
std::vector<SelftestLine> selftest(SelftestLevel level);

/// Ok, or internal "wrong-arithmetic" for the first line that is wrong, with the name of the BLAS and the
/// remedy.
Status selftest_status(const std::vector<SelftestLine>& lines);

/// selftest() and what it says, for the start of a long job.
Status arithmetic_selftest(SelftestLevel level);

}  // namespace stanchion
