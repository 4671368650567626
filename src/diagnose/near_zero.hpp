// The eigenvectors of A_s nearest to zero, in every connected part at once.
#pragma once

#include <cmath>
#include <cstdint>
#include <vector>

#include "diagnose/kept_factor.hpp"
#include "diagnose/local_motions.hpp"
#include "diagnose/subspace.hpp"

namespace stanchion {

/// Ritz pairs of one part: columns [0, used) of NearZero::x on the part's rows, ascending in |value|.
struct PartPairs {
  Index part = 0, used = 0;
  Ritz ritz;
};

struct NearZero {
  Columns x;
  std::vector<PartPairs> parts;  ///< by part number
  int rounds = 0;
  bool cut_short = false;  ///< by a pair that was enough, as far as plain double precision tells
};

/// Pairs that are told apart from zero: |value| is at most `most` and, less the residual, more than `above`.
struct TellingRange {
  double above = INFINITY, most = 0;  ///< none
  bool holds(double size, double residual) const { return size <= most && size - residual > above; }
};

struct NearZeroOptions {
  Index columns = 8;  ///< vectors per part; one solve serves all parts, which do not touch
  double wanted = 0;  ///< pairs with |value| up to here must settle where a gap behind them is in sight
  double zero = 0;    ///< and up to here in any case
  std::uint64_t seed = 1;
  TellingRange enough;  ///< a pair in it ends the search
};

/// Whether a pair found lies in the range that is enough.
bool any_told_apart(const NearZero& found, const NearZeroOptions& options);

/// Block inverse iteration with the kept factor of A_s - cI, `motions` kept out, one Rayleigh-Ritz projection
/// a round and part (Parlett, The Symmetric Eigenvalue Problem, 1998, ch. 14). Ends when the wanted pairs
/// have settled (values that run up without a gap are no cause, whatever they are), or after some rounds; the
/// residuals say which. `start`: vectors of an earlier search with fewer columns; the others are random.
/// Cost: a round takes one solve and one product. Memory: three times the columns.
NearZero find_near_zero(const Structure& structure, const ShiftedMatrix& matrix, KeptFactor& factor,
                        const LocalMotions& motions, const NearZeroOptions& options, Columns start,
                        ThreadPool& pool);

}  // namespace stanchion
