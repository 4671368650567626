#include "diagnose/diagnosis.hpp"

#include <algorithm>
#include <utility>

#include "base/clock.hpp"
#include "diagnose/dependent_constraints.hpp"
#include "diagnose/local_accuracy.hpp"
#include "diagnose/naming.hpp"
#include "diagnose/near_choice.hpp"
#include "diagnose/negative.hpp"

namespace stanchion {
namespace {

constexpr double kCouplingDigits = 9;  ///< lost in one coupling: worth an entry

/// A row: numbers of nodes, dofs and parts, places, links and what is sorted on the way; measured 60 to 200.
constexpr Offset kStructureBytes = 200;

}  // namespace

Diagnosis diagnose(const DiagnosisInput& input, ThreadPool& pool) {
  const Stopwatch watch;
  Diagnosis diagnosis;
  Evidence e(input, pool);
  if (e.inertia.zero > 0) e.motions = find_local_motions(e.s, input.matrix, pool);
  if (look_near_zero(e)) {
    diagnosis.sharper_resolution = std::max(4 * e.bound(), 0x1p-46 * e.resolution);
    return diagnosis;
  }
  e.picture = make_picture(e.s, input.matrix);
  e.seams = find_seams(e.s, input.matrix);
  e.couplings = find_stiff_couplings(e.s, input.matrix, kCouplingDigits);
  choose_zero_and_weak(e);
  name_node_motions(e);
  name_repeated_constraints(e);
  name_bundles(e, false);
  name_bundles(e, true);
  name_negative(e);
  name_stiff_couplings(e);
  account(e);
  judge_local_accuracy(e);
  diagnosis.outcome = std::move(e.out);
  diagnosis.outcome.picture = std::move(e.picture.picture);
  diagnosis.outcome.weak_below = input.options.weak_below;
  diagnosis.outcome.seconds = watch.seconds();
  return diagnosis;
}

Offset diagnosis_bytes(Index rows, Index zero, Index negative, const LocateOptions& options) {
  constexpr Offset kBlock = kBlockVectors;
  const Offset near = most_near_columns(zero);
  // While they are looked for: the vectors, their products, a copy by columns, a block that is solved for. In
  // extended precision the copy is gone, and sums of four blocks and the scaled vectors are there.
  Offset columns = std::max(3 * near + 2 * kBlock, 2 * near + 7 * kBlock);
  if (negative > 0)
    columns = std::max(columns, near + negative_columns(std::min(negative, options.most)) + 2 * kBlock);
  return Offset{rows} * (columns * Offset{sizeof(double)} + kStructureBytes) +
         dependent_constraint_bytes(rows, zero);
}

}  // namespace stanchion
