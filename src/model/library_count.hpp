// Factorizations of a certificate made again by another library, which counts pivots but proves nothing.
#pragma once

#include <functional>
#include <optional>
#include <string>
#include <vector>

#include "model/claims.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// Lower triangle, every entry once; rows and columns count from 1.
struct TripletMatrix {
  Index rows = 0;
  std::vector<Index> row, column;
  std::vector<double> value;
};

/// The number of negative pivots of a factorization with pivoting; an error when there is none.
using CountNegative = std::function<Result<Index>(const TripletMatrix& matrix)>;

/// One factorization of the certificate, or the one it rests on.
struct LibraryCount {
  std::optional<double> shift;  ///< absent for check
  double offset = 0;            ///< taken off the scaled matrix
  Index claimed = 0;
  std::optional<Index> found;
  std::string why_not;  ///< without `found`: why there is none
};

/// All that one library was asked.
struct LibraryComparison {
  std::string name, version;
  std::vector<LibraryCount> counts;
};

/// Agreed when every factorization gives the same number or nothing was there to ask. A differing number is
/// no contradiction, for it carries no error bound; it does not repeat the claim either.
inline Agreement agreement_of(const LibraryComparison& comparison) {
  for (const LibraryCount& count : comparison.counts) {
    if (count.found != count.claimed) return Agreement::kNotRepeated;
  }
  return Agreement::kAgreed;
}

}  // namespace stanchion
