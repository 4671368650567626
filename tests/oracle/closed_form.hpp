// The Laplacian of a box at any size: certified counts against the closed form.
#pragma once

#include <algorithm>
#include <vector>

#include "oracle/certified.hpp"
#include "support/generators.hpp"

namespace stanchion::test {

/// Middles of gaps of the sorted spectrum at least `width` wide, the first one past each of `parts`.
inline std::vector<double> shifts_in_gaps(const std::vector<double>& sorted, const std::vector<double>& parts,
                                          double width) {
  std::vector<double> shifts;
  for (const double part : parts) {
    for (auto i = static_cast<std::size_t>(part * static_cast<double>(sorted.size())); i + 1 < sorted.size();
         ++i) {
      if (sorted[i + 1] - sorted[i] < width) continue;
      shifts.push_back((sorted[i] + sorted[i + 1]) / 2);
      break;
    }
  }
  return shifts;
}

/// Middles of the widest gap among the twentieth of the spectrum past each of `parts`.
inline std::vector<double> shifts_in_widest_gaps(const std::vector<double>& sorted,
                                                 const std::vector<double>& parts) {
  std::vector<double> shifts;
  for (const double part : parts) {
    const auto first = static_cast<std::size_t>(part * static_cast<double>(sorted.size()));
    std::size_t best = first;
    for (auto i = first; i + 1 < std::min(sorted.size(), first + sorted.size() / 20); ++i) {
      if (sorted[i + 1] - sorted[i] > sorted[best + 1] - sorted[best]) best = i;
    }
    shifts.push_back((sorted[best] + sorted[best + 1]) / 2);
  }
  return shifts;
}

/// Certifies the box at `shifts`: proved, nothing left at zero, as many below as the closed form says.
inline void expect_proved_counts(Index nx, Index ny, Index nz, const std::vector<double>& sorted,
                                 const std::vector<double>& shifts, int threads) {
  for (const double shift : shifts) {
    SCOPED_TRACE("shift " + std::to_string(shift));
    const auto below =
        static_cast<Index>(std::lower_bound(sorted.begin(), sorted.end(), shift) - sorted.begin());
    const auto found = certify(prepare(laplacian(nx, ny, nz, shift), threads));
    EXPECT_EQ(found.certificate.level, Level::kProved);
    EXPECT_EQ(found.inertia.negative, below);
    EXPECT_EQ(found.inertia.zero, 0);
    EXPECT_EQ(found.inertia.positive, static_cast<Index>(sorted.size()) - below);
  }
}

/// Certifies the box at shifts in gaps `width` wide at the given parts of the spectrum; returns how many were
/// compared.
inline int expect_closed_form_counts(Index nx, Index ny, Index nz, const std::vector<double>& parts,
                                     double width, int threads) {
  auto spectrum = laplacian_spectrum(nx, ny, nz);
  std::sort(spectrum.begin(), spectrum.end());
  const std::vector<double> shifts = shifts_in_gaps(spectrum, parts, width);
  expect_proved_counts(nx, ny, nz, spectrum, shifts, threads);
  return static_cast<int>(shifts.size());
}

}  // namespace stanchion::test
