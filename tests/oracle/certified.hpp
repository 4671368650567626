// One call from a matrix to its certified inertia, for tests that need no files.
#pragma once

#include "inertia/two_offsets.hpp"
#include "support/factored.hpp"

namespace stanchion::test {

inline CertifiedInertia certify(const Prepared& prepared, OffsetOptions options = {}) {
  auto result = certify_by_offsets(prepared.analysis, prepared.shifted(0), options, *prepared.pool);
  EXPECT_TRUE(result.ok()) << result.status().to_string();
  return result.ok() ? std::move(*result) : CertifiedInertia{};
}

/// A + shift I, on A's pattern and the diagonal.
inline SymmetricMatrix plus_identity(const SymmetricMatrix& matrix, double shift) {
  std::vector<Triplet> entries;
  for (Index j = 0; j < matrix.rows; ++j) {
    entries.push_back({j, j, shift});
    for (Offset k = matrix.column_start[j]; k < matrix.column_start[Offset{j} + 1]; ++k) {
      entries.push_back({matrix.row[k], j, matrix.value[k]});
    }
  }
  return from_triplets(matrix.rows, entries);
}

}  // namespace stanchion::test
