#include <fmt/format.h>

#include <algorithm>

#include "model/numbers.hpp"
#include "report/text_sections.hpp"

namespace stanchion {
namespace {

/// " at the resolution 1e-11", for verdicts that say something about zero.
std::string at_resolution(const Certificate& certificate) {
  if (!certificate.resolution) return "";
  return " at the resolution " + rounded(*certificate.resolution);
}

std::string directions(const Inertia& inertia) {
  return fmt::format("{}, {}", counted(inertia.negative, "negative direction"),
                     counted(inertia.zero, "zero direction"));
}

/// "K", or the sum that was judged.
std::string subject(const Outcome& outcome) {
  const auto added = std::count_if(outcome.inputs.begin(), outcome.inputs.end(),
                                   [](const InputRecord& input) { return input.role == "added"; });
  return added == 0 ? "K"
                    : fmt::format("The sum of K and {}",
                                  added == 1 ? "the added matrix" : fmt::format("{} added matrices", added));
}

std::string verdict_sentence(const CheckOutcome& check, const std::string& matrix, Index rows) {
  const Inertia& inertia = check.inertia;
  const std::string resolution = at_resolution(check.certificate);
  switch (check.verdict) {
    case Verdict::kPositiveDefinite:
      return fmt::format("{} is positive definite: no negative and no zero direction in {}.", matrix,
                         counted(rows, "equation"));
    case Verdict::kPositiveSemidefinite:
      return fmt::format("{} is positive semidefinite{}: {}, no negative one.", matrix, resolution,
                         counted(inertia.zero, "zero direction"));
    case Verdict::kNegativeSemidefinite:
      return fmt::format("{} is negative semidefinite{}: {}, no positive one.", matrix, resolution,
                         directions(inertia));
    case Verdict::kNegativeDefinite:
      return fmt::format("{} is negative definite: all {} are negative (a wrong sign?).", matrix,
                         counted(inertia.negative, "direction"));
    case Verdict::kIndefinite:
      return fmt::format("{} is indefinite: {}{}.", matrix, directions(inertia),
                         inertia.zero > 0 ? resolution : "");
    case Verdict::kUnresolved:
      break;
  }
  return fmt::format("Unresolved: the sign of {} could not be certified{}.",
                     counted(inertia.undecided, "direction"), resolution);
}

/// With multipliers the structure on its constraints is what a person asks about; the bordered matrix itself
/// is always indefinite.
std::string constrained_sentence(const ConstrainedOutcome& constrained, const Certificate& certificate) {
  if (constrained.inertia && constrained.inertia->undecided == 0) {
    const Inertia& inertia = *constrained.inertia;
    if (inertia.negative == 0 && inertia.zero == 0) {
      return "On its constraints the structure is positive definite: no negative and no zero direction.";
    }
    return fmt::format("On its constraints the structure has {}{}.", directions(inertia),
                       inertia.zero > 0 ? at_resolution(certificate) : "");
  }
  if (!constrained.negative_range)
    return "Unresolved: how the structure stands on its constraints is not known.";
  if (constrained.negative_range->first == constrained.negative_range->second) {
    return fmt::format("On its constraints the structure has {}.",
                       counted(constrained.negative_range->first, "negative direction"));
  }
  return fmt::format("On its constraints the structure has between {} and {} negative directions.",
                     grouped(constrained.negative_range->first), grouped(constrained.negative_range->second));
}

std::string verdict_in_words(Verdict verdict) {
  switch (verdict) {
    case Verdict::kPositiveDefinite:
      return "positive definite";
    case Verdict::kPositiveSemidefinite:
      return "positive semidefinite at the resolution";
    case Verdict::kNegativeSemidefinite:
      return "negative semidefinite at the resolution";
    case Verdict::kNegativeDefinite:
      return "negative definite";
    case Verdict::kIndefinite:
      return "indefinite";
    case Verdict::kUnresolved:
      break;
  }
  return "unresolved";
}

/// What the verdict means for the structure, in one plain sentence; nothing where that goes without saying.
std::string consequence(const CheckOutcome& check) {
  if (check.constrained) {
    return fmt::format("Its {} make K indefinite; that is no fault.",
                       counted(check.constrained->multipliers, "multiplier"));
  }
  switch (check.verdict) {
    case Verdict::kPositiveSemidefinite:
      return "Along a zero direction the structure moves with no resistance that the resolution can see: a "
             "missing support, a mechanism, a part that nothing holds, or a motion too soft for these "
             "numbers.";
    case Verdict::kIndefinite:
      return "Along a negative direction the structure gives way by itself: it is past a critical state, or "
             "the "
             "matrix has a fault.";
    case Verdict::kUnresolved:
      return "No verdict is given, because none is certain. A larger --resolution may settle it, with zero "
             "directions stated more coarsely.";
    default:
      return "";
  }
}

void write_inertia(Page& page, const Inertia& inertia) {
  std::string text = fmt::format("{} negative, {} zero, {} positive", grouped(inertia.negative),
                                 grouped(inertia.zero), grouped(inertia.positive));
  if (inertia.undecided > 0) text += fmt::format(", {} undecided", grouped(inertia.undecided));
  page.row("inertia", text);
}

std::string method_in_words(const Certificate& certificate) {
  std::string text;
  if (certificate.method == "offsets") {
    text = certificate.runs.size() == 1 ? ", from one factorization shifted off zero"
                                        : ", from factorizations on both sides of zero";
  } else if (certificate.method == "relative") {
    text = ", from one factorization compared with the matrix itself";
  }
  if (certificate.precision) text += ", in " + *certificate.precision + " precision";
  return text;
}

void write_certificate(Page& page, const Certificate& certificate) {
  page.row("backed by", backing_in_words(certificate.level, certificate.failure_probability) +
                            method_in_words(certificate));
  for (const OffsetRun& run : certificate.runs) {
    const std::string bound = run.error_bound ? "rounding errors at most " + rounded(*run.error_bound)
                                              : "no bound on the rounding errors";
    page.row("", fmt::format("offset {:+.3g}: {} below, {}", run.offset, grouped(run.negative), bound));
  }
  if (certificate.relative_bound) {
    page.row("",
             fmt::format("relative error at most {} (1 is the limit)", rounded(*certificate.relative_bound)));
  }
  if (certificate.resolution) {
    page.row("resolution",
             rounded(*certificate.resolution) + " of the scaled matrix, whose rows are about 1");
  }
  if (certificate.smallest_eigenvalue_above) {
    std::string text = "the smallest eigenvalue of the scaled matrix exceeds " +
                       rounded(*certificate.smallest_eigenvalue_above);
    if (certificate.smallest_eigenvalue_of_k_above) {
      text += ", that of K itself " + rounded(*certificate.smallest_eigenvalue_of_k_above);
    }
    page.row("it follows", text);
  }
  for (const std::string& assumption : certificate.assumptions) page.row("assuming", assumption);
}

void write_witness(Page& page, const Witness& witness) {
  page.row("witness",
           fmt::format("x^T K x = {}, {} at most off, for a vector x (in {}): one product shows to "
                       "anyone that K is not positive definite",
                       rounded(witness.quadratic_form), rounded(witness.error_bound),
                       witness.path ? *witness.path : "the JSON"));
}

/// "12, 15 and 1,203 more": the first few of a list.
std::string first_of(const std::vector<Index>& equations) {
  constexpr std::size_t kShown = 8;
  std::string text;
  for (std::size_t k = 0; k < std::min(kShown, equations.size()); ++k) {
    text += fmt::format("{}{}", k == 0 ? "" : ", ", equations[k]);
  }
  if (equations.size() > kShown)
    text += fmt::format(" and {} more", grouped(static_cast<Offset>(equations.size() - kShown)));
  return text;
}

std::string backing_in_words(const Backing& backing) {
  return stanchion::backing_in_words(backing.level, backing.failure_probability);
}

void write_constrained(Page& page, const ConstrainedOutcome& constrained) {
  page.title("The structure on its constraints");
  std::string multipliers = counted(constrained.multipliers, "multiplier");
  if (constrained.rank) multipliers += fmt::format(", {} independent", grouped(*constrained.rank));
  if (constrained.redundant) multipliers += fmt::format(", {} redundant", grouped(*constrained.redundant));
  page.row("constraints", multipliers);
  if (constrained.rank) page.row("rank by", backing_in_words(constrained.rank_backing));
  if (!constrained.redundant_equations.empty()) {
    page.row("redundant", "the multipliers of equations " + first_of(constrained.redundant_equations));
  }
  if (constrained.inertia) write_inertia(page, *constrained.inertia);
  if (constrained.negative_range) {
    const auto& [least, most] = *constrained.negative_range;
    const std::string range =
        least == most ? grouped(least) : fmt::format("between {} and {}", grouped(least), grouped(most));
    page.row("negative", range + ": the rank of the constraints is not certified");
  }
  if (constrained.inertia || constrained.negative_range) {
    page.row("backed by", backing_in_words(constrained.inertia_backing));
  }
}

}  // namespace

void write_check(Page& page, const Outcome& outcome) {
  const CheckOutcome& check = *outcome.check;
  if (check.constrained) page.sentence(constrained_sentence(*check.constrained, check.certificate));
  page.sentence(verdict_sentence(check, subject(outcome), outcome.rows_analysed));
  if (const std::string meaning = consequence(check); !meaning.empty()) page.sentence(meaning);
  if (check.verdict_for_digits) {
    page.sentence("That is the verdict for the numbers as written.");
    page.sentence(fmt::format("For every matrix whose rounding gives the numbers in the file: {}.",
                              verdict_in_words(*check.verdict_for_digits)));
  }
  page.blank();
  write_inertia(page, check.inertia);
  write_certificate(page, check.certificate);
  if (check.witness) write_witness(page, *check.witness);
  if (check.constrained) write_constrained(page, *check.constrained);
}

}  // namespace stanchion
