// Matrices that make trouble, reproducible from a seed.
#pragma once

#include <cmath>
#include <random>
#include <vector>

#include "sparse/symmetric_matrix.hpp"

namespace stanchion::test {

using Random = std::mt19937_64;

inline double uniform(Random& random, double low, double high) {
  return std::uniform_real_distribution<double>(low, high)(random);
}

/// 7-point Laplacian of an nx x ny x nz box with fixed ends, shifted: eigenvalues are
/// sum over directions of 4 sin^2(k pi / (2 (n + 1))) minus `shift` (closed form).
inline SymmetricMatrix laplacian(Index nx, Index ny, Index nz, double shift = 0) {
  std::vector<Triplet> entries;
  const auto id = [&](Index x, Index y, Index z) { return x + nx * (y + ny * z); };
  const double diagonal = (nx > 1 ? 2 : 0) + (ny > 1 ? 2 : 0) + (nz > 1 ? 2 : 0);
  for (Index z = 0; z < nz; ++z) {
    for (Index y = 0; y < ny; ++y) {
      for (Index x = 0; x < nx; ++x) {
        entries.push_back({id(x, y, z), id(x, y, z), diagonal - shift});
        if (x + 1 < nx) entries.push_back({id(x + 1, y, z), id(x, y, z), -1});
        if (y + 1 < ny) entries.push_back({id(x, y + 1, z), id(x, y, z), -1});
        if (z + 1 < nz) entries.push_back({id(x, y, z + 1), id(x, y, z), -1});
      }
    }
  }
  return from_triplets(nx * ny * nz, entries);
}

/// Closed-form spectrum of laplacian(nx, ny, nz, 0), unsorted.
inline std::vector<double> laplacian_spectrum(Index nx, Index ny, Index nz) {
  const auto term = [](Index k, Index n) {
    if (n == 1) return 0.0;
    const double s = std::sin((k + 1) * M_PI / (2.0 * (n + 1)));
    return 4 * s * s;
  };
  std::vector<double> values;
  for (Index z = 0; z < nz; ++z) {
    for (Index y = 0; y < ny; ++y) {
      for (Index x = 0; x < nx; ++x) values.push_back(term(x, nx) + term(y, ny) + term(z, nz));
    }
  }
  return values;
}

/// Random sparse symmetric matrix: about `degree` entries a row; `zero_diagonal` of the diagonal is exactly
/// zero.
inline SymmetricMatrix random_sparse(Random& random, Index n, double degree, double zero_diagonal,
                                     double dominance) {
  std::vector<Triplet> entries;
  for (Index i = 0; i < n; ++i) {
    const bool zero = uniform(random, 0, 1) < zero_diagonal;
    entries.push_back({i, i, zero ? 0.0 : uniform(random, -1, 1) + dominance});
  }
  const auto count = static_cast<Offset>(degree * n / 2);
  for (Offset k = 0; k < count; ++k) {
    const auto i = static_cast<Index>(uniform(random, 0, n)), j = static_cast<Index>(uniform(random, 0, n));
    if (i != j && i < n && j < n) entries.push_back({i, j, uniform(random, -1, 1)});
  }
  return from_triplets(n, entries);
}

/// [H B^T; B 0] with `m` constraints on `n` unknowns; B has independent rows (an identity block in front).
inline SymmetricMatrix saddle(Random& random, Index n, Index m) {
  std::vector<Triplet> entries;
  for (Index i = 0; i < n; ++i) {
    entries.push_back({i, i, 2 + uniform(random, 0, 1)});
    if (i > 0) entries.push_back({i, i - 1, -1});
  }
  for (Index c = 0; c < m; ++c) {
    entries.push_back({n + c, c, 1});
    for (int k = 0; k < 3; ++k) {
      const auto j = static_cast<Index>(uniform(random, m, n));
      if (j < n) entries.push_back({n + c, j, uniform(random, -1, 1)});
    }
  }
  return from_triplets(n + m, entries);
}

/// Rows and columns multiplied by powers of ten between 10^-range and 10^range.
inline SymmetricMatrix wildly_scaled(Random& random, SymmetricMatrix matrix, double range) {
  std::vector<double> scale(static_cast<std::size_t>(matrix.rows));
  for (double& s : scale) s = std::pow(10.0, uniform(random, -range, range));
  for (Index j = 0; j < matrix.rows; ++j) {
    for (Offset k = matrix.column_start[j]; k < matrix.column_start[Offset{j} + 1]; ++k) {
      matrix.value[k] *= scale[static_cast<std::size_t>(j)] * scale[static_cast<std::size_t>(matrix.row[k])];
    }
  }
  return matrix;
}

}  // namespace stanchion::test
