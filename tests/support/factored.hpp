// One call from a matrix to its factorization, for tests below the engine.
#pragma once

#include <gtest/gtest.h>

#include <array>
#include <memory>

#include "numeric/factorization.hpp"
#include "sparse/scaling.hpp"
#include "symbolic/analysis.hpp"

namespace stanchion::test {

/// Owns everything a ShiftedMatrix points into.
struct Prepared {
  MatrixFamily family;  ///< in elimination order
  Buffer<double> scale;
  Analysis analysis;
  std::unique_ptr<ThreadPool> pool;

  ShiftedMatrix shifted(double offset) const {
    return {&family, std::vector<double>(family.values.size(), 1.0), &scale, offset};
  }
  Factorization factor(double offset, FactorOptions options = {}) const {
    auto result = factorize(analysis, shifted(offset), options, *pool);
    EXPECT_TRUE(result.ok()) << result.status().to_string();
    return result.ok() ? std::move(*result) : Factorization{};
  }
};

/// `scaled` false: S = I, so that the factored matrix is the matrix itself.
inline Prepared prepare(const SymmetricMatrix& matrix, int threads = 1, bool scaled = true) {
  Prepared prepared;
  prepared.pool = std::make_unique<ThreadPool>(threads);
  auto analysis = analyse({&matrix, {}, true}, threads);
  EXPECT_TRUE(analysis.ok());
  prepared.analysis = std::move(*analysis);
  const std::array<const SymmetricMatrix*, 1> members{&matrix};
  prepared.family = permute(unite(members), prepared.analysis.tree.position_of);
  if (scaled) {
    const std::vector<double> ones{1.0};
    prepared.scale = std::move(*power_of_two_scaling(prepared.family, ones));
  } else {
    prepared.scale = Buffer<double>(matrix.rows, 1.0);
  }
  return prepared;
}

}  // namespace stanchion::test
