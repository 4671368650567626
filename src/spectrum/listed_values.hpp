// Somebody's list of values held against what is certain: who is missing, who is not there at all.
#pragma once

#include <cstddef>
#include <vector>

#include "spectrum/staircase.hpp"

#include "stanchion/types.hpp"

namespace stanchion {

/// An interval with a number of values in it: listed ones within their tolerances, or certain ones.
struct ValueSpan {
  double low = 0, high = 0;
  Index count = 1;
  std::vector<std::size_t> members;  ///< numbers of the listed values
};

/// Listed values whose tolerances meet are one cluster; ascending. `values`: one span each, in any order.
std::vector<ValueSpan> clusters_of(std::vector<ValueSpan> values);

/// A stretch of the range with what is listed and what is certain in it. The stretches fill the range, and no
/// value of either kind reaches over an end of one.
struct Stretch {
  double low = 0, high = 0;
  Index listed = 0, certain = 0;
  std::vector<std::size_t> members;        ///< numbers of the listed values
  std::vector<std::size_t> certain_spans;  ///< numbers of the certain ones
};

/// Joins listed and certain spans that meet, and cuts the range from `from` to `to` midway between what is
/// left apart.
std::vector<Stretch> compare_spans(const std::vector<ValueSpan>& listed,
                                   const std::vector<ValueSpan>& certain, double from, double to);

/// Whether every one of `listed` can have a value of its own that lies within its tolerance, out of
/// `certain`, disjoint and ascending with as many values as their counts. Clusters whose tolerances form a
/// chain may hold the right number without that.
bool each_has_its_own(const std::vector<ValueSpan>& listed, const std::vector<ValueSpan>& certain);

/// Whether every one of `listed` certainly has a value of its own within its tolerance: whole intervals of
/// `certain`, wherever in them the values are.
bool each_surely_has_its_own(const std::vector<ValueSpan>& listed, const std::vector<ValueSpan>& certain);

/// Where one count each tells what every cluster holds: `from`, the middle between neighbouring clusters,
/// `to`.
std::vector<double> shifts_in_gaps(const std::vector<ValueSpan>& clusters, double from, double to);

enum class Placement { kShown, kRefuted, kOpen };

/// Whether each of the closed `listed` spans has a value of its own in it, by counts alone: `facts`,
/// ascending, say how many values there are below their shifts. Spans and values are taken to be equal in
/// number (counts around them). By Hall's theorem each has its own exactly when every interval from the low
/// end of one span to the high end of another holds as many values as it contains spans. Counts at all ends
/// of all spans tell, unless one of them lies on a value.
Placement placement(const std::vector<ValueSpan>& listed, const std::vector<CountFact>& facts);

}  // namespace stanchion
