// Loops over runs of indices, by all threads of a pool.
#pragma once

#include <algorithm>

#include "base/threads.hpp"

namespace stanchion {

/// Calls work(begin, end) for runs of `grain` indices that cover [0, size); which thread takes which run is
/// not reproducible, the runs themselves are.
template <class Work>
void for_ranges(ThreadPool& pool, Offset size, Offset grain, const Work& work) {
  if (size <= grain) {
    if (size > 0) work(Offset{0}, size);
    return;
  }
  pool.run((size + grain - 1) / grain,
           [&](Offset piece, int) { work(piece * grain, std::min(piece * grain + grain, size)); });
}

}  // namespace stanchion
