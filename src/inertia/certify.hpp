// The certified inertia of one matrix by whichever method is forecast cheaper, escalating when one cannot
// tell.
#pragma once

#include "inertia/relative.hpp"
#include "inertia/two_offsets.hpp"

namespace stanchion {

/// Factoring in single precision, with the relative test in double.
enum class SingleUse {
  kNever,
  kWhereFaster,  ///< where the relative test would be used anyway and the arithmetic is most of the work;
                 ///< redone in double when the bound does not close
  kFirst,        ///< before anything else, whatever is forecast; redone in double likewise
  kOnly,         ///< nothing else, definite or not: unresolved when the bound does not close
};

struct CertifyOptions {
  OffsetOptions offsets;       ///< resolution or data error given: offsets only
  RiskBudget* risk = nullptr;  ///< of the document; null: no statistical statement is allowed
  std::uint64_t seed = 1;
  Offset most_factor_bytes = 0;  ///< memory that keeping a factor may take
  SingleUse single = SingleUse::kNever;
  const ShiftedMatrix* second = nullptr;  ///< of the pencil: asks for the radius free of eigenvalues, too
};

/// What certify_inertia() will do when its first choice succeeds, and what more when it does not.
struct LikelyWork {
  Index factorizations = 0, more_if_not = 0;
  bool relative = false, relative_if_not = false;  ///< with the relative test on a kept factor
  bool single = false;                             ///< the first one in single precision
};
LikelyWork likely_work(const Analysis& analysis, const CertifyOptions& options);

/// Definite expected: one factorization with an offset, without pivoting, is the cheapest proof. Otherwise
/// the two offsets where their second factorization is cheap, else the relative test (one factorization,
/// kept) where memory and risk allow, first in single precision where options.single says so; L is stored in
/// single precision where only that fits. What leaves zero
/// directions escalates to the other; the offsets have the last word, at a resolution. Errors: those of the
/// methods.
Result<CertifiedInertia> certify_inertia(const Analysis& analysis, const ShiftedMatrix& matrix,
                                         const CertifyOptions& options, ThreadPool& pool);

}  // namespace stanchion
