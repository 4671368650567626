// From the inertia of a matrix and a kept factor to causes with nodes, motions, explanations and remedies.
#pragma once

#include <cstdint>
#include <optional>

#include "base/threads.hpp"
#include "diagnose/structure.hpp"
#include "inertia/two_offsets.hpp"
#include "stanchion/located.hpp"
#include "stanchion/outcome.hpp"
#include "stanchion/request.hpp"

namespace stanchion {

struct DiagnosisInput {
  const Analysis& analysis;
  const ShiftedMatrix& matrix;          ///< as judged, without offset
  const ShiftedMatrix* bare = nullptr;  ///< K without what is added, where something is
  const KeptFactorization& kept;        ///< of A_s - cI
  const CertifiedInertia& certified;    ///< level proved
  ModelNames names;
  Index rightly_negative =
      0;                   ///< negative directions that multipliers bring along: the least rank of their rows
  bool rank_known = true;  ///< that rank is certain, not the end of a range
  bool constraints_apply = true;  ///< false: multipliers act on each other
  LocateOptions options;
  std::uint64_t seed = 1;
  bool may_sharpen = true;        ///< the matrix can be certified again with a smaller offset
  bool resolution_given = false;  ///< by whoever asks: what is zero was not decided by the error bound
};

struct Diagnosis {
  LocateOutcome outcome;
  /// A smaller offset that would tell apart what the inertia calls zero and the vectors found call small.
  std::optional<double> sharper_resolution;
};

/// Finds, purifies, judges and names. When `sharper_resolution` is set, which it never is unless the input
/// allows it, nothing else is filled: certify again with it. Every located direction is held against A_s
/// itself in double-double. Reproducible for any number of threads. Throws std::bad_alloc. Cost: some ten
/// solves and products; memory: diagnosis_bytes() beside the factor.
Diagnosis diagnose(const DiagnosisInput& input, ThreadPool& pool);

/// Forecast of the memory that diagnose() takes beside matrix and factor, for so many zero and negative
/// directions (those of multipliers not among them).
Offset diagnosis_bytes(Index rows, Index zero, Index negative, const LocateOptions& options);

}  // namespace stanchion
