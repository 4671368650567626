// Small dense pencils C x = theta B x with theta known from dense eigenvalues, and the sparse form of them.
#pragma once

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <random>
#include <vector>

#include "dense/symmetric_eigen.hpp"
#include "spectrum/definite_base.hpp"
#include "symbolic/analysis.hpp"

namespace stanchion::test {

/// B = T T^T and C = T diag(theta) T^T with a banded T: theta are the eigenvalues by construction, exactly
/// where products of small integers are exact.
struct KnownPencil {
  SymmetricMatrix base, second;
  std::vector<double> thetas;
};

/// T unit lower bidiagonal with entries in {-1/2, 0, 1/2} below the diagonal: products with `thetas` on a
/// coarse grid are exact in double, so the thetas are exact eigenvalues.
inline KnownPencil known_pencil(const std::vector<double>& thetas, unsigned seed) {
  std::mt19937 random(seed);
  const auto n = static_cast<Index>(thetas.size());
  std::vector<double> below(thetas.size(), 0);
  for (double& entry : below) entry = 0.5 * (static_cast<int>(random() % 3) - 1);
  std::vector<Triplet> b, c;
  for (Index i = 0; i < n; ++i) {
    const auto k = static_cast<std::size_t>(i);
    const double t = i > 0 ? below[k] : 0, before = i > 0 ? thetas[k - 1] : 0;
    b.push_back({i, i, 1 + t * t});
    c.push_back({i, i, thetas[k] + t * t * before});
    if (i == 0) continue;
    b.push_back({i, i - 1, t});
    c.push_back({i, i - 1, t * before});
  }
  return {from_triplets(n, b), from_triplets(n, c), thetas};
}

/// Everything a DefiniteBase refers to.
struct PencilParts {
  Analysis analysis;
  MatrixFamily family;
  Buffer<double> scale;
  ThreadPool pool{1};

  explicit PencilParts(const KnownPencil& pencil) {
    const std::vector<const SymmetricMatrix*> members{&pencil.base, &pencil.second};
    MatrixFamily joined = unite(members);
    SymmetricMatrix pattern{joined.rows, joined.column_start.clone(), joined.row.clone(),
                            joined.values[0].clone()};
    auto analysed = analyse({&pattern, {}, true, false}, 1);
    EXPECT_TRUE(analysed.ok());
    analysis = std::move(*analysed);
    family = permute(joined, analysis.tree.position_of);
    scale = Buffer<double>(joined.rows, 1.0);
  }
  ShiftedMatrix base() const { return {&family, {1, 0}, &scale, 0}; }
  ShiftedMatrix second() const { return {&family, {0, 1}, &scale, 0}; }

  DefiniteBase make_base(double risk = 1e-6) {
    RiskBudget budget(risk);
    DefiniteBaseOptions options;
    options.risk = &budget;
    auto made = DefiniteBase::make(analysis, base(), options, pool);
    EXPECT_TRUE(made.ok() && *made);
    return std::move(**made);
  }
};

}  // namespace stanchion::test
