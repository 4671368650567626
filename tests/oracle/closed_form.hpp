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

/// Certifies the box at shifts in gaps `width` wide at the given parts of the spectrum; returns how many were
/// compared.
inline int expect_closed_form_counts(Index nx, Index ny, Index nz, const std::vector<double>& parts,
                                     double width, int threads) {
  auto spectrum = laplacian_spectrum(nx, ny, nz);
  std::sort(spectrum.begin(), spectrum.end());
  int compared = 0;
  for (const double shift : shifts_in_gaps(spectrum, parts, width)) {
    SCOPED_TRACE("shift " + std::to_string(shift));
    const auto below =
        static_cast<Index>(std::lower_bound(spectrum.begin(), spectrum.end(), shift) - spectrum.begin());
    const auto found = certify(prepare(laplacian(nx, ny, nz, shift), threads));
    EXPECT_EQ(found.certificate.level, Level::kProved);
    EXPECT_EQ(found.inertia.negative, below);
    EXPECT_EQ(found.inertia.zero, 0);
    EXPECT_EQ(found.inertia.positive, static_cast<Index>(spectrum.size()) - below);
    ++compared;
  }
  return compared;
}

}  // namespace stanchion::test
