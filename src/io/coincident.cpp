#include "io/coincident.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>

namespace stanchion {

double extent_of(const std::vector<std::array<double, 3>>& places) {
  double extent = 0;
  for (std::size_t d = 0; d < 3 && !places.empty(); ++d) {
    const auto [low, high] = std::minmax_element(places.begin(), places.end(),
                                                 [d](const auto& a, const auto& b) { return a[d] < b[d]; });
    extent = std::max(extent, (*high)[d] - (*low)[d]);
  }
  return extent;
}

std::vector<std::pair<std::size_t, std::size_t>> coincident_places(
    const std::vector<std::array<double, 3>>& places, double near) {
  constexpr std::size_t kCrowd = 8;
  std::vector<std::size_t> order(places.size());
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) {
    return places[a][0] != places[b][0] ? places[a][0] < places[b][0] : a < b;
  });
  std::vector<std::pair<std::size_t, std::size_t>> pairs;
  // Runs of places whose x differ step by step by `near` at most, sorted by y and z: neighbours there may
  // coincide.
  for (std::size_t begin = 0; begin < order.size();) {
    std::size_t end = begin + 1;
    while (end < order.size() && places[order[end]][0] - places[order[end - 1]][0] <= near) ++end;
    const auto first = order.begin() + static_cast<std::ptrdiff_t>(begin),
               last = order.begin() + static_cast<std::ptrdiff_t>(end);
    std::sort(first, last, [&](std::size_t a, std::size_t b) {
      const auto &p = places[a], &q = places[b];
      return p[1] != q[1] ? p[1] < q[1] : p[2] != q[2] ? p[2] < q[2] : a < b;
    });
    for (std::size_t k = begin; k < end; ++k) {
      for (std::size_t j = k + 1; j < end && j <= k + kCrowd; ++j) {
        const auto &p = places[order[k]], &q = places[order[j]];
        if (q[1] - p[1] > near) break;
        if (std::fabs(q[2] - p[2]) > near || std::fabs(q[0] - p[0]) > near) continue;
        pairs.emplace_back(std::min(order[k], order[j]), std::max(order[k], order[j]));
      }
    }
    begin = end;
  }
  std::sort(pairs.begin(), pairs.end());
  return pairs;
}

}  // namespace stanchion
