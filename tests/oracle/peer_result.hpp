// What a general-purpose solver says of a symmetric matrix, in our words.
#pragma once

#include "stanchion/types.hpp"

namespace stanchion::test {

/// Known after the analysis.
struct PeerStructure {
  bool ok = false;
  Offset factor_entries = 0;  ///< of L, diagonal included, without relaxation zeros
  double factor_flops = 0;    ///< without relaxation zeros
  const char* ordering = "";  ///< the method effectively used
};

/// Known after the factorization.
struct PeerFactorization {
  bool ok = false;        ///< the solver reported no error
  bool definite = false;  ///< all pivots positive
  Offset negative = 0;    ///< pivots; for a solver without pivoting meaningful only when definite
  Offset delayed_pivots = 0;
  Offset stored_entries = 0;  ///< of the factor as held
  int error_code = 0;         ///< the solver's own
};

}  // namespace stanchion::test
