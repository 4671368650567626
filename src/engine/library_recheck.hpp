// The factorizations that a certificate rests on, made again by another library.
#pragma once

#include "engine/pipeline.hpp"
#include "model/library_count.hpp"

namespace stanchion {

/// Reads and scales the model of `request` as `claimed` has it and asks `count` for every factorization that
/// decides a claim: those at plus and minus the resolution, or the matrix at the shift itself for a relative
/// certificate. Left out are claims of nothing, those in extended precision (no library in double sees such
/// offsets), and counts with dofs without mass by the relative test (what K has there is not in the
/// certificate). Nothing when the matrix is now scaled in another way. Errors: those of reading the model;
/// interrupted.
Result<std::vector<LibraryCount>> count_by_library(const Request& request, const Outcome& claimed,
                                                   const CountNegative& count, const RunContext& context);

}  // namespace stanchion
