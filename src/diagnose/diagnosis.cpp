#include "diagnose/diagnosis.hpp"

#include <algorithm>
#include <utility>

#include "base/clock.hpp"
#include "diagnose/local_accuracy.hpp"
#include "diagnose/naming.hpp"
#include "diagnose/near_choice.hpp"

namespace stanchion {
namespace {

constexpr double kCouplingDigits = 9;  ///< lost in one coupling: worth an entry

}  // namespace

Diagnosis diagnose(const DiagnosisInput& input, ThreadPool& pool) {
  const Stopwatch watch;
  Diagnosis diagnosis;
  Evidence e(input, pool);
  if (e.inertia.zero > 0) e.motions = find_node_motions(e.s, input.matrix);
  look_near_zero(e);
  if (wants_sharper_offset(e)) {
    diagnosis.sharper_resolution = std::max(4 * e.bound(), 0x1p-46 * e.resolution);
    return diagnosis;
  }
  e.picture = make_picture(e.s, input.matrix);
  e.seams = find_seams(e.s, input.matrix);
  e.couplings = find_stiff_couplings(e.s, input.matrix, kCouplingDigits);
  choose_zero_and_weak(e);
  name_node_motions(e);
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

}  // namespace stanchion
