#include "diagnose/words.hpp"

#include <fmt/format.h>

#include <cctype>

#include "model/numbers.hpp"

namespace stanchion {
namespace {

std::string listed(const std::vector<std::string>& items) {
  std::string text;
  for (std::size_t k = 0; k < items.size(); ++k) {
    text += (k == 0 ? "" : k + 1 == items.size() ? " and " : ", ") + items[k];
  }
  return text;
}

/// Without a dof map every equation stands for itself.
std::string nodes_in_words(const CauseFacts& f) {
  const char* noun = f.named ? "node" : "equation";
  return f.nodes == 1 ? fmt::format("one {}", noun) : counted(f.nodes, noun);
}

/// "node 12", without its dof.
std::string node_alone(const CauseFacts& f) {
  return f.place.substr(0, f.place.find(','));
}

std::string around(const CauseFacts& f) {
  return f.nodes == 1 ? node_alone(f) : fmt::format("the {} around {}", nodes_in_words(f), f.place);
}

std::string loose_part(const CauseFacts& f) {
  const std::string free =
      f.motions.empty()
          ? (f.count == 1 ? std::string("it can move freely in one way")
                          : fmt::format("it can move freely in {} independent ways", grouped(f.count)))
          : fmt::format("it can move freely as one rigid body: {}{}", listed(f.motions),
                        static_cast<Index>(f.motions.size()) < f.count
                            ? fmt::format(" and {} more, which are turns or cannot be named without "
                                          "coordinates",
                                          grouped(f.count - static_cast<Index>(f.motions.size())))
                            : "");
  std::string text;
  if (f.whole_part && f.only_part) {
    text = fmt::format("The whole model ({}) is not held: {}.", nodes_in_words(f), free);
  } else if (f.whole_part) {
    text =
        fmt::format("{}: this part shares no stiffness with the rest and is not held; {}.", around(f), free);
  } else {
    text = fmt::format("{}: attached to the rest, but not against every motion; {}.", around(f), free);
  }
  if (!f.hangs.empty()) text += fmt::format(" It hangs on the rest at {}.", f.hangs);
  if (f.by_connectivity) {
    text += !f.placed          ? " Told by connectivity alone, for no coordinates are known."
            : !f.displacements ? " Told by connectivity alone, for its dofs are no displacements."
                               : "";
  }
  if (!f.seam.empty()) text += " " + f.seam + ": a seam that was likely meant to be joined.";
  return text;
}

std::string mechanism(const CauseFacts& f) {
  std::string text;
  if (f.rigid && !f.pattern) {
    text = fmt::format("{}: this part can turn against the rest without resistance, as on a hinge: {}.",
                       around(f), listed(f.motions));
    if (!f.hangs.empty()) text += fmt::format(" It hangs on the rest at {}.", f.hangs);
  } else {
    const std::string meets =
        f.count == 1 ? "a motion meets" : fmt::format("{} independent motions meet", grouped(f.count));
    text = f.chain ? fmt::format(
                         "{}: {} no resistance, about as many as there are joints: a pinned chain, or bars "
                         "that form no triangles.",
                         around(f), meets)
           : f.pattern
               ? fmt::format(
                     "{}: {} no resistance in which neighbouring nodes move against each other: a pattern "
                     "that the elements do not feel, as those integrated at too few points leave "
                     "(hourglass), or unbraced panels.",
                     around(f), meets)
               : fmt::format(
                     "{}: {} no resistance (a hinge, a pinned chain, or a pattern of elements whose shapes "
                     "do not strain).",
                     around(f), meets);
  }
  if (!f.separated) text += " Several causes may be mixed in here; the nodes are those that move most.";
  if (!f.seam.empty()) text += " " + f.seam + ".";
  return text;
}

}  // namespace

namespace {

std::string sentence_of(const CauseFacts& f) {
  switch (f.cause) {
    case Cause::kLoosePart:
      return loose_part(f);
    case Cause::kMechanism:
      return mechanism(f);
    case Cause::kUnattachedDof:
      if (f.across_bars) {
        return fmt::format(
            "{}{}: no stiffness at all across what holds the {} otherwise, as where bars meet in one line (a "
            "pinned "
            "chain): {} without any resistance.",
            f.nodes == 1 ? "" : nodes_in_words(f) + ", among them ", f.place, f.nodes == 1 ? "node" : "nodes",
            f.count == 1 ? "one direction" : counted(f.count, "direction"));
      }
      return f.count == 1
                 ? fmt::format("{}: the equation has no stiffness at all; nothing is attached to this dof.",
                               f.place)
                 : fmt::format(
                       "{} equations{}, {} among them, have no stiffness at all: nothing is attached to "
                       "these dofs.",
                       grouped(f.count), f.named ? fmt::format(" ({}) at {}", f.dof, nodes_in_words(f)) : "",
                       f.place);
    case Cause::kMissingRotation:
      return fmt::format(
          "{}: nothing resists a rotation of the node itself, {} in all; the elements there have no "
          "stiffness about that axis (no drilling stiffness, or bars only). One cause, however many nodes.",
          f.nodes == 1 ? f.place : fmt::format("{}, {} among them", nodes_in_words(f), f.place),
          f.count == 1 ? "one direction" : counted(f.count, "direction"));
    case Cause::kNegativeSpring:
      if (!f.other_place.empty()) {
        return fmt::format(
            "{} and {}: a spring between them of stiffness {:.4g} {} pushes them apart instead of back. {} "
            "(checked "
            "with the factor).",
            f.place, f.other_place, f.stiffness, f.along,
            f.essential ? "With the opposite sign one negative direction is gone"
                        : "Taking it away takes one negative direction away");
      }
      if (!f.felt) {
        return fmt::format(
            "{}: the diagonal entry is {:.4g} and none beside it is negative: a spring to the ground pushes "
            "along instead of back, more strongly than that. Adding {:.4g} there takes one negative "
            "direction "
            "away (checked with the factor).",
            f.place, f.stiffness / 2, -f.stiffness);
      }
      return fmt::format(
          "{}: a spring to the ground of stiffness {:.4g} pushes along instead of back. Taking it away takes "
          "one negative direction away (checked with the factor).",
          f.place, f.stiffness);
    case Cause::kNegativePatch:
      return fmt::format(
          "{}: the stiffness of a few neighbouring nodes is negative along this motion, as from an element "
          "or spring with a wrong sign, or one that has softened past zero.",
          f.place);
    case Cause::kUnstableWhole:
      return fmt::format(
          "{} give way together, {} the most: the structure as a whole is unstable in this state{}.",
          nodes_in_words(f), f.place,
          f.stiffness < 0 ? "; K alone resists the motion, what is added to it does not: the state is past a "
                            "critical load"
                          : ", as past a critical load");
    case Cause::kRedundantConstraint:
      return fmt::format(
          "{}: {} can exchange force among themselves without any effect on the structure.",
          f.follow
              ? (f.count == 1 ? "One constraint follows from several others"
                              : fmt::format("{} constraints follow from several others", grouped(f.count)))
          : f.count == 1 ? "One constraint repeats others"
                         : fmt::format("{} constraints repeat others", grouped(f.count)),
          f.nodes > 1 ? fmt::format("the multipliers of {}, {} among them,", nodes_in_words(f), node_alone(f))
                      : "the multipliers of " + node_alone(f));
    case Cause::kNearMechanism:
      return fmt::format(
          "{}: positive, but the resistance to this motion is only {:.2g} of what the dofs have by "
          "themselves{}.{}",
          f.place, f.energy,
          f.motions.empty() ? ""
                            : fmt::format("; {} move as one rigid body on something very soft ({})",
                                          nodes_in_words(f), listed(f.motions)),
          f.seam.empty() ? "" : " " + f.seam + ".");
    case Cause::kOverStiffCoupling:
      return fmt::format(
          "{}: this coupling is so stiff that about {:.0f} of 16 decimal digits of what its neighbours feel "
          "are lost{}.",
          f.place, f.digits, f.count == 1 ? "" : fmt::format(" ({} such couplings)", grouped(f.count)));
    case Cause::kUnresolved:
      break;
  }
  return f.unresolved_because;
}

}  // namespace

std::string explanation_of(const CauseFacts& f) {
  std::string text = sentence_of(f);
  if (!text.empty()) text[0] = static_cast<char>(std::toupper(static_cast<unsigned char>(text[0])));
  return text;
}

std::string remedy_of(const CauseFacts& f) {
  switch (f.cause) {
    case Cause::kLoosePart:
      if (!f.seam.empty()) return "Merge the coincident nodes, or tie them together.";
      return f.whole_part && f.only_part
                 ? "Give the model its supports, or hold the equations with --fix."
                 : "Connect the part to the structure, or support it against the motions named.";
    case Cause::kMechanism:
      return "Remove a release too many, brace the chain, or hold the motion; check element types and end "
             "releases there.";
    case Cause::kUnattachedDof:
      return "Attach an element that acts on the dof, or hold it (--fix).";
    case Cause::kMissingRotation:
      return "Hold these rotations, use elements that have the stiffness, or leave the dofs out.";
    case Cause::kNegativeSpring:
      return "Check the sign and the value of the spring.";
    case Cause::kNegativePatch:
      return "Check signs, thicknesses and material values of the elements at these nodes; a softening "
             "material or a "
             "stress stiffness may be meant.";
    case Cause::kUnstableWhole:
      return "Count the critical factors of the load (count --geometric), and look at the load level of this "
             "state.";
    case Cause::kRedundantConstraint:
      if (f.follow)
        return "Leave out one constraint of every set that closes on itself; it does no harm to the "
               "structure, "
               "but the forces in the set are not determined.";
      return "Remove the constraints that repeat others; they do no harm to the structure, but the forces in "
             "them are "
             "not determined.";
    case Cause::kNearMechanism:
      return "If the softness is meant, leave it; otherwise connect the part properly. Results along this "
             "motion are "
             "sensitive.";
    case Cause::kOverStiffCoupling:
      return "Use a constraint equation in place of a penalty, or lower it to some 1e5 times the stiffness "
             "around it "
             "(common practice, no source).";
    case Cause::kUnresolved:
      break;
  }
  if (f.resolution_given)
    return "Leave out --resolution, or give a smaller one: what is zero is then decided by the error bound.";
  return "Ask again with --precision extended (check), or clear the other causes first.";
}

}  // namespace stanchion
