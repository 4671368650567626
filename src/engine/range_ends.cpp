#include "engine/range_ends.hpp"

#include <algorithm>
#include <cmath>

#include "model/shift_grid.hpp"

namespace stanchion {
namespace {

/// An end of the range lies in a gap of at least this relative width, so that the count there is easily
/// certified. Nothing to do with what mode_search.cpp calls a cluster, though of the same size.
constexpr double kGap = 1e-5;

}  // namespace

Result<std::optional<CountFact>> RangeEnds::at(double end, int outwards, bool may_move) {
  if (counter_.two_sided() && end == 0) {  // K is definite: n(0) = 0, and 0 itself is never a value
    return std::optional<CountFact>(counter_.fact_at_origin());
  }
  auto asked = proof_.count_at(end);
  if (!asked.ok() || (*asked && (*asked)->exact())) return asked;
  if (!may_move) return std::optional<CountFact>();
  const auto band = *asked ? (*asked)->band : std::nullopt;
  const double size = std::fabs(end), edge = !band ? end : outwards > 0 ? band->second : band->first;
  return behind(std::fabs(edge - end) < kFarthestEnd * size ? edge : end, size, outwards);
}

Result<std::optional<CountFact>> RangeEnds::behind(double start, double size, int outwards) {
  for (double part = kNearestEnd; part < kFarthestEnd; part *= 32) {
    const double shift = shortest_between(start + outwards * part * size, start + 2 * outwards * part * size);
    auto beyond = proof_.count_at(shift);
    if (!beyond.ok()) return beyond;
    if (*beyond && (*beyond)->exact()) return beyond;
  }
  return std::optional<CountFact>();
}

Result<bool> RangeEnds::look_further(double& end, Side side, Offset many) {
  constexpr int kStrides = 4;
  constexpr double kStride = 32;
  const double signs[2] = {1, -1};
  for (int k = 0; k < kStrides; ++k) {
    Offset inside = 0;
    for (const double sign : signs) {
      if (side != Side::kBoth && (sign > 0) != (side == Side::kPositive)) continue;
      auto fact = proof_.count_at(sign * end * kStride);
      if (!fact.ok()) return fact.status();
      if (!*fact || !(*fact)->exact()) return true;  // as far as counts can tell
      inside += std::abs((*fact)->least);
    }
    if (inside > many) return false;
    end *= kStride;
  }
  return true;
}

std::size_t end_of_cluster(const Candidates& found, std::size_t wanted) {
  for (std::size_t many = wanted; many <= found.leading && many > 0; ++many) {
    if (many >= found.list.size()) return 0;
    const double last = std::fabs(found.list[many - 1].theta), next = std::fabs(found.list[many].theta);
    const double gap = last - next;
    if (gap > kGap * last && found.list[many].ritz.residual < 0.2 * gap) return many;
    if (gap > kGap * last) return 0;
  }
  return 0;
}

double gap_of(const Candidates& found, std::size_t many, double theta) {
  if (many == 0 || many >= found.list.size()) return 0.5;
  const double next = std::fabs(found.list[many].theta);
  return std::clamp((theta - next) / theta, 0.0, 0.5);
}

}  // namespace stanchion
