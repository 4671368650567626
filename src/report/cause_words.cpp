#include "report/cause_words.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <utility>

#include "model/numbers.hpp"

namespace stanchion {

const char* title_of(Cause cause) {
  switch (cause) {
    case Cause::kLoosePart:
      return "Loose part";
    case Cause::kMechanism:
      return "Mechanism";
    case Cause::kUnattachedDof:
      return "Unattached dof";
    case Cause::kMissingRotation:
      return "Missing rotational stiffness";
    case Cause::kNegativeSpring:
      return "Negative spring";
    case Cause::kNegativePatch:
      return "Negative patch";
    case Cause::kUnstableWhole:
      return "Unstable as a whole";
    case Cause::kRedundantConstraint:
      return "Redundant constraint";
    case Cause::kNearMechanism:
      return "Near-mechanism";
    case Cause::kOverStiffCoupling:
      return "Over-stiff coupling";
    case Cause::kUnresolved:
      break;
  }
  return "Unresolved";
}

std::string how_many(const Direction& direction) {
  if (direction.cause == Cause::kOverStiffCoupling) return counted(direction.count, "coupling");
  const char* kind = direction.sign < 0    ? "negative direction"
                     : direction.sign == 0 ? "zero direction"
                                           : "weak direction";
  return counted(direction.count, kind);
}

std::string dof_in_words(const DofShare& share) {
  if (share.node) return fmt::format("node {} {}", *share.node, share.dof);
  const bool numbered = share.dof.rfind("equation", 0) == 0;
  return numbered ? share.dof : fmt::format("{} of equation {}", share.dof, share.equation);
}

std::string percent(double share) {
  if (share < 0.001) return "<0.1 %";
  return share < 0.0995 ? fmt::format("{:.1f} %", 100 * share) : fmt::format("{:.0f} %", 100 * share);
}

std::string location_headline(const LocateOutcome& located) {
  if (located.directions.empty() && located.not_located == 0) {
    return fmt::format(
        "No cause was found: no negative, no zero, and no weak direction that stands apart (energy ratio "
        "below {}).",
        exact(located.weak_below));
  }
  std::string text =
      located.directions.size() == 1 ? "One entry" : fmt::format("{} entries", located.directions.size());
  Index weak = 0, couplings = 0;
  for (const Direction& direction : located.directions) {
    if (direction.sign == 1)
      (direction.cause == Cause::kOverStiffCoupling ? couplings : weak) += direction.count;
  }
  std::string kinds;
  for (const auto& [count, noun] :
       {std::pair{located.negative, "negative direction"}, std::pair{located.zero, "zero direction"},
        std::pair{weak, "weak direction"}, std::pair{couplings, "over-stiff coupling"}}) {
    if (count > 0) kinds += (kinds.empty() ? "" : ", ") + counted(count, noun);
  }
  text += " for " + kinds;
  if (located.not_located > 0) {
    text += fmt::format("; {} more {} counted but not shown", grouped(located.not_located),
                        located.not_located == 1 ? "is" : "are");
  }
  return text + ".";
}

std::string accuracy_verdict(const LocalAccuracy& accuracy) {
  if (accuracy.largest >= accuracy.alarm) return "in alarm";
  return accuracy.largest >= accuracy.attention ? "deserves attention" : "nothing to report";
}

std::string held_in_words(const LocalAccuracy& accuracy) {
  constexpr std::size_t kShown = 6;
  std::string text;
  const std::size_t shown = std::min(kShown, accuracy.held.size());
  for (std::size_t k = 0; k < shown; ++k) text += (k == 0 ? "" : "; ") + dof_in_words(accuracy.held[k]);
  const Offset rest = Offset{accuracy.held_directions} - static_cast<Offset>(shown);
  return rest > 0 ? text + fmt::format("; and {} more", grouped(rest)) : text;
}

}  // namespace stanchion
