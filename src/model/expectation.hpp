// What the user says the answer should be (`--expect`), and whether it is.
#pragma once

#include <string_view>

#include "model/question.hpp"
#include "stanchion/outcome.hpp"
#include "stanchion/status.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

struct Expectation {
  enum class Kind {
    kPositiveDefinite,  ///< check: the verdict; count: nothing below any shift
    kZero,              ///< check: positive semidefinite with `count` zero directions
    kNoneBelow,         ///< bracket: no value in the range
    kComplete,          ///< audit: the list is complete, and nothing in it is surplus
    kNegative,          ///< check: `count` negative directions; count: `count` below every shift
  };
  Kind kind = Kind::kPositiveDefinite;
  Index count = 0;
};

/// "positive-definite", "zero:6", "negative:2", "none-below", "complete". Error: bad usage
/// ("bad-expectation").
Result<Expectation> parse_expectation(std::string_view text);

/// Bad usage ("expectation-not-applicable") when the question cannot meet the expectation at all.
Status check_applicable(const Expectation& expectation, Question question);

/// kOpen: what was certified neither confirms nor refutes the expectation.
enum class Comparison { kMet, kNotMet, kOpen };

/// With multipliers the constrained structure is compared, not the bordered matrix.
Comparison compare(const Expectation& expectation, const CheckOutcome& check);

/// Every shift must meet it; one refuted shift refutes it.
Comparison compare(const Expectation& expectation, const CountOutcome& count);

/// Every step must meet it.
Comparison compare(const Expectation& expectation, const PathOutcome& path);

Comparison compare(const Expectation& expectation, const BracketOutcome& bracket);
Comparison compare(const Expectation& expectation, const AuditOutcome& audit);

}  // namespace stanchion
