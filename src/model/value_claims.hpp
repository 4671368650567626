// Brackets and audits of two answers to one question, held against each other statement by statement.
#pragma once

#include <optional>
#include <span>
#include <string>
#include <vector>

#include "model/claims.hpp"

namespace stanchion {

/// Why the statements of a bracket or an audit cannot be what they say: intervals that meet, numbers that do
/// not add up to what the range holds, a verdict that its gaps deny. Nothing when all fits.
std::optional<std::string> contradiction_within(const BracketOutcome& bracket);
std::optional<std::string> contradiction_within(const AuditOutcome& audit);

/// Shifts at which counts can settle what `claimed` says of intervals and ranges and `found` does not: both
/// ends of each, in order.
std::vector<double> value_ends(const BracketOutcome& claimed, const BracketOutcome& found);

/// Every value, the completeness and the other side. An interval is agreed when `found` has exactly as many
/// values certainly in it; else by `at_ends`, counts by the second path at value_ends(), in that order.
std::vector<ClaimComparison> compare_brackets(const BracketOutcome& claimed, const BracketOutcome& found,
                                              std::span<const ShiftCount> at_ends);

/// Verdict, range and every gap of an audit, and what was bracketed in the gaps.
std::vector<ClaimComparison> compare_audits(const AuditOutcome& claimed, const AuditOutcome& found);

}  // namespace stanchion
