// Small matrices, and readings of text, for the tests of this folder.
#pragma once

#include <algorithm>
#include <random>
#include <string>
#include <vector>

#include "io/read_matrix.hpp"
#include "sparse/symmetric_matrix.hpp"

namespace stanchion::testing {

inline bool same(const SymmetricMatrix& a, const SymmetricMatrix& b) {
  return a.rows == b.rows &&
         std::equal(a.column_start.begin(), a.column_start.end(), b.column_start.begin()) &&
         a.entries() == b.entries() && std::equal(a.row.begin(), a.row.end(), b.row.begin()) &&
         std::equal(a.value.begin(), a.value.end(), b.value.begin(),
                    [](double x, double y) { return std::memcmp(&x, &y, sizeof x) == 0; });
}

/// A random symmetric matrix with a full diagonal and values of very different size.
inline SymmetricMatrix scattered(Index rows, int per_row, unsigned seed) {
  std::mt19937 random(seed);
  std::uniform_int_distribution<Index> row(0, rows - 1);
  std::normal_distribution<double> exponent(0, 40), digits(0, 1);
  std::vector<Triplet> triplets;
  for (Index i = 0; i < rows; ++i) {
    triplets.push_back({i, i, 1.0 + std::fabs(digits(random))});
    for (int k = 0; k < per_row; ++k) {
      const Index j = row(random);
      if (i != j)
        triplets.push_back({std::max(i, j), std::min(i, j), digits(random) * std::exp(exponent(random))});
    }
  }
  return from_triplets(rows, triplets);
}

inline Result<MatrixFile> read_text(std::string_view text, const MatrixReadOptions& options = {},
                                    int threads = 2) {
  ThreadPool pool(threads);
  return read_matrix_bytes(text, "k.mtx", options, pool);
}

/// Whether a warning of this code is among `warnings`.
inline const Warning* find_warning(const Warnings& warnings, const std::string& code) {
  for (const Warning& warning : warnings) {
    if (warning.code == code) return &warning;
  }
  return nullptr;
}

}  // namespace stanchion::testing
