// Close estimates of the values of a pencil and their vectors, and rigorous pairs from them.
#pragma once

#include <optional>
#include <vector>

#include "engine/spectral_base.hpp"
#include "spectrum/block_lanczos.hpp"
#include "spectrum/block_rows.hpp"
#include "spectrum/residual_intervals.hpp"
#include "spectrum/shifted_inverse.hpp"

namespace stanchion {

struct Candidate {
  RitzValue ritz;
  double theta = 0;    ///< as an eigenvalue of C x = theta B x
  bool close = false;  ///< by the estimate of its residual and, in a gap, the square of it
};

/// What the space holds of one side, or of both, by size.
struct Candidates {
  std::vector<Candidate> list;
  std::size_t leading = 0;  ///< so many from the start are close
};

/// Block Lanczos in the energy coordinates of a base, from the outermost thetas inwards (the values nearest
/// to the base), or from a theta inside the spectrum outwards (shift and invert). Refers to all it is given.
class ModeSearch {
 public:
  ModeSearch(PencilCounter& counter, SpectralBase& base, const Request& request, const RunContext& context,
             ThreadPool& pool, Outcome& outcome);

  /// From the outside: the largest thetas of either sign. `keep`: what a full space of vectors is reduced to.
  void start(Index wanted, const KeptValues& keep);

  /// From a value inside the range `from` to `to`, so that those in it come first. False when no factor can
  /// be kept there. Cost: one factorization, kept until the next start.
  Result<bool> start_inside(double from, double to, Index wanted);

  /// Steps until `enough` says so; false when the space is exhausted or the steps are used up first.
  Result<bool> iterate(const std::function<bool()>& enough);

  /// After start_inside() sorted by distance from the shift, of both signs always.
  Candidates candidates(Side side);

  /// Rigorous pairs for the first `many` of `list`, refined where they are not close enough.
  Result<std::vector<ResidualPair>> pairs_of(const std::vector<Candidate>& list, std::size_t many);

  /// When values were missed: residuals must be small by themselves from now on, or, when that was asked
  /// already, a block of fresh random vectors joins the space. False when the space is everything there is.
  bool look_closer();

  /// Whether the first `wanted` of `found`, of one side or of both, are so hard to tell apart from here that
  /// a base near them pays: they lie close together, many steps were taken, and the first is known well
  /// enough.
  bool crowded(const Candidates& found, std::size_t wanted) const;

  /// Whether a second kept factor has room, once the vectors of this search are gone.
  bool room_for_factor() const;

  /// Size of the largest theta found so far; 0 when nothing is.
  double largest();

 private:
  void make_space(BlockLanczos::Operator apply, Index wanted, const KeptValues& keep);
  double closeness() const;
  bool squares() const;
  bool interrupted() const;
  Index steps_to_next_look() const;
  void refine(ResidualWork& work, std::vector<ResidualPair>& pairs);

  PencilCounter& counter_;
  SpectralBase& base_;
  const Request& request_;
  const RunContext& context_;
  ThreadPool& pool_;
  Outcome& outcome_;
  BlockRows rows_;                         ///< of C
  std::optional<BlockRows> energy_;        ///< of B, where the inverse at a shift is used
  std::optional<ShiftedInverse> inverse_;  ///< of K - sigma M or K + sigma G
  std::optional<double> centre_;           ///< theta of sigma
  std::optional<BlockLanczos> lanczos_;
  std::vector<double> work_;
  Index wanted_ = 0;
  std::size_t leading_ = 0;  ///< close enough when last looked at
  bool strict_ = false;      ///< no use is made of what gaps add to a residual
  KeptValues keep_;
};

}  // namespace stanchion
