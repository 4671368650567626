#include <fmt/format.h>

#include "model/names.hpp"
#include "model/numbers.hpp"
#include "report/text_sections.hpp"

namespace stanchion {
namespace {

std::string words_of(Verdict verdict) {
  std::string words = name_of(verdict);
  for (char& c : words) {
    if (c == '_') c = ' ';
  }
  return words;
}

std::string signs_of(const Inertia& inertia) {
  if (inertia.undecided > 0) return "undecided";
  return fmt::format("{} negative, {} zero", grouped(inertia.negative), grouped(inertia.zero));
}

}  // namespace

void write_path(Page& page, const Outcome& outcome) {
  const PathOutcome& path = *outcome.path;
  const auto many = static_cast<Offset>(path.steps.size());
  if (!path.first_not_definite) {
    page.sentence(fmt::format("All {} steps are positive definite.", grouped(many)));
  } else {
    const PathStep& step = path.steps[static_cast<std::size_t>(*path.first_not_definite - 1)];
    page.sentence(fmt::format("Step {} of {} ({}) is the first that is not positive definite: {}.",
                              *path.first_not_definite, grouped(many), step.path, words_of(step.verdict)));
  }
  if (path.first_negative) {
    page.sentence(fmt::format("The first negative direction appears at step {}.", *path.first_negative));
  }
  page.sentence("Crossings between two steps are not seen.");
  page.blank();
  std::vector<std::vector<std::string>> rows{{"step", "", "verdict", "directions", "backed by", "matrix"}};
  for (std::size_t k = 0; k < path.steps.size(); ++k) {
    const PathStep& step = path.steps[k];
    rows.push_back({grouped(static_cast<Offset>(k) + 1), step.changed ? "changed" : "",
                    words_of(step.verdict), signs_of(step.inertia),
                    backing_in_words(step.certificate.level, step.certificate.failure_probability),
                    step.path});
  }
  page.table(rows, 1);
}

}  // namespace stanchion
