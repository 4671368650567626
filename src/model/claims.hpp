// Two answers to one question, held against each other claim by claim.
//
// A certified statement about the scaled matrix is a set of facts "at least a eigenvalues lie below s" and
// "at most b lie below t". Two facts with s <= t and a > b cannot both be true, whoever found them. Signs
// speak about 0 and survive any scaling (Sylvester); facts away from 0 compare only where both answers scaled
// the matrix alike.
#pragma once

#include <optional>
#include <span>
#include <string>
#include <vector>

#include "stanchion/outcome.hpp"

namespace stanchion {

enum class Agreement {
  kAgreed,        ///< the new statement is certified, compatible and says at least as much
  kNotRepeated,   ///< compatible, but the new statement says less, or one of the two says nothing
  kContradicted,  ///< the two cannot both be true, or the claim contradicts itself
};

struct ClaimComparison {
  std::optional<double> shift;  ///< absent for the inertia of check
  Agreement agreement = Agreement::kNotRepeated;
  std::string claimed, found;  ///< both statements in words
  std::string why;             ///< empty when agreed
};

/// Compares the answers of `claimed` and `found`, which are to one question (both check, or both count with
/// the same shifts), and what the risk of `claimed` must be. `at_ends`: counts by the second path at
/// interval_ends(claimed, found), in that order; without them only distances that `found` itself gives are
/// repeated.
std::vector<ClaimComparison> compare_claims(const Outcome& claimed, const Outcome& found,
                                            std::span<const ShiftCount> at_ends = {});

/// Shifts at which counts can show what `claimed` says of intervals around its shifts and `found` does not:
/// the two ends of each.
std::vector<double> interval_ends(const Outcome& claimed, const Outcome& found);

/// The worst of them; kNotRepeated when there is none.
Agreement worst(const std::vector<ClaimComparison>& comparisons);

/// Resolutions at which a new run could show that `claimed` is wrong about its zero directions, where `found`
/// differs without a contradiction. May be empty.
std::vector<double> telling_resolutions(const Certificate& claimed, const Certificate& found);

}  // namespace stanchion
