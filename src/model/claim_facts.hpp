// Facts about the eigenvalues of a scaled matrix, and when two of them exclude each other.
#pragma once

#include <vector>

#include "stanchion/outcome.hpp"

namespace stanchion {

/// "At least" or "at most" `count` eigenvalues of the scaled matrix lie below `at`.
struct Fact {
  double at = 0;
  Offset count = 0;
};

struct Facts {
  std::vector<Fact> least, most;
};

/// Every factorization of A_s - o I with m negative pivots and error e shows lambda_m < o + e and
/// lambda_(m+1) >= o - e. Rounded outwards.
Facts facts_of_runs(const Certificate& certificate);

/// What the inertia itself says: signs about 0 and, unless `signs_only`, zero directions about the
/// resolution.
Facts facts_of_inertia(const Inertia& inertia, const Certificate& certificate, Index rows, bool signs_only);

void append(Facts& facts, const Facts& more);

/// "At least a below s" of one and "at most b below t" of the other with s <= t and a > b.
bool cannot_both_be_true(const Facts& one, const Facts& other);

}  // namespace stanchion
