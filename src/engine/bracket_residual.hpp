// Brackets from one kept factor: mode shapes, rigorous residual intervals, and counts at the ends of the
// range.
#pragma once

#include "engine/bracket_question.hpp"

namespace stanchion {

struct ResidualQuestion {
  ValueRange range;            ///< low absent: from everything
  bool past_values = false;    ///< where an end lies on a value, the range may go on behind that
  std::optional<Index> first;  ///< instead of a range
  Side side = Side::kPositive;
};

struct ResidualAnswer {
  std::optional<FoundRange> found;  ///< nothing: it could not be shown this way, bisection has to do it
  Staircase counts;                 ///< made on the way, for whoever goes on
  Index more_than_asked = 0;        ///< taken in because a cluster goes on at the end
  Index fewer_than_asked = 0;       ///< so many do not exist in the range that was searched
  Index on_ends = 0;                ///< of those found, so many may lie on either side of an end asked
};

/// The values asked, in groups with disjoint intervals whose number equals the certified count of the range.
/// Settles what counts mean, unless `counter` is judged already; when they do not count values the answer is
/// empty. With `first` the zeros of a free body are taken in on top. Errors: those of factoring; internal
/// when certified statements contradict each other. Cost: two to four factorizations, one of them kept, and
/// some ten to thirty passes over it.
Result<ResidualAnswer> bracket_by_residuals(PencilCounter& counter, const Request& request,
                                            const RunContext& context, const ResidualQuestion& question,
                                            ThreadPool& pool, Outcome& outcome);

}  // namespace stanchion
