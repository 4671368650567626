#include "diagnose/bundle_judge.hpp"

#include <algorithm>
#include <cmath>

#include "diagnose/subspace.hpp"

namespace stanchion {

std::vector<Judged> judge(const Evidence& e, const std::vector<Bundle>& bundles) {
  std::vector<Judged> judged(bundles.size());
  std::vector<Index> used(static_cast<std::size_t>(e.s.parts), 0), at(bundles.size());
  Index most = 0;
  for (std::size_t b = 0; b < bundles.size(); ++b) {
    Index& next = used[static_cast<std::size_t>(bundles[b].part)];
    at[b] = next;
    next += static_cast<Index>(bundles[b].x.count);
    most = std::max(most, next);
  }
  if (most == 0) return judged;
  Columns x(e.s.rows, whole_blocks(most));
  for (std::size_t b = 0; b < bundles.size(); ++b) {
    const LocalVectors& v = bundles[b].x;
    for (std::size_t i = 0; i < v.rows.size(); ++i) std::copy_n(v.row(i), v.count, x.row(v.rows[i]) + at[b]);
  }
  const Columns ax = times_extended(e.in.matrix, x, e.pool);
  std::vector<double> residual(static_cast<std::size_t>(e.s.parts) * static_cast<std::size_t>(most), 0.0);
  for (Index i = 0; i < e.s.rows; ++i) {
    const auto part = static_cast<std::size_t>(e.part_of_row(i));
    for (Index c = 0; c < most; ++c) {
      residual[part * static_cast<std::size_t>(most) + static_cast<std::size_t>(c)] +=
          ax.row(i)[c] * ax.row(i)[c];
    }
  }
  for (std::size_t b = 0; b < bundles.size(); ++b) {
    const LocalVectors& v = bundles[b].x;
    for (std::size_t c = 0; c < v.count; ++c) {
      const auto column = static_cast<std::size_t>(at[b]) + c;
      double work = 0, size = 0;
      for (std::size_t i = 0; i < v.rows.size(); ++i) {
        const double y = v.row(i)[c];
        work += y * ax.row(v.rows[i])[column];
        size += e.weight(v.rows[i]) * y * y;
      }
      const double energy = size > 0 ? work / size : 0;
      if (std::fabs(energy) >= std::fabs(judged[b].energy)) judged[b].energy = energy;
      const auto part = static_cast<std::size_t>(bundles[b].part);
      judged[b].residual =
          std::max(judged[b].residual, std::sqrt(residual[part * static_cast<std::size_t>(most) + column]));
    }
  }
  return judged;
}

}  // namespace stanchion
