#include "report/junit.hpp"

#include <fmt/format.h>

#include <vector>

#include "model/names.hpp"
#include "report/cause_words.hpp"
#include "report/markup.hpp"
#include "report/numbers.hpp"
#include "report/page.hpp"
#include "report/text_sections.hpp"

namespace stanchion {
namespace {

enum class State { kPassed, kFailed, kError };

struct Case {
  std::string name, message;
  State state = State::kPassed;
};

/// A case for every matrix of a load path; where the whole answer is what was expected, all of them are.
void add_steps(std::vector<Case>& cases, const PathOutcome& path, bool good) {
  for (std::size_t k = 0; k < path.steps.size(); ++k) {
    const PathStep& step = path.steps[k];
    const bool known = step.verdict != Verdict::kUnresolved;
    cases.push_back({fmt::format("step {}, {}", k + 1, step.path),
                     fmt::format("{}: {} negative, {} zero, {} undecided", name_of(step.verdict),
                                 step.inertia.negative, step.inertia.zero, step.inertia.undecided),
                     !known                                               ? State::kError
                     : good || step.verdict == Verdict::kPositiveDefinite ? State::kPassed
                                                                          : State::kFailed});
  }
}

std::vector<Case> cases_of(const Outcome& outcome, bool good, bool unresolved) {
  Page page;
  write_answer(page, outcome);
  const std::string headline = page.blocks().empty() ? outcome.command : page.blocks().front().text;
  std::vector<Case> cases{{outcome.command + " answers well", headline,
                           unresolved ? State::kError
                           : good     ? State::kPassed
                                      : State::kFailed}};
  if (outcome.count) {
    for (const ShiftCount& count : outcome.count->counts) {
      const bool known = count.below.has_value() && count.level != Level::kNone;
      cases.push_back({"count at " + exact(count.shift),
                       known ? fmt::format("{} {}", *count.below, count.meaning)
                             : fmt::format("between {} and {} {}", count.below_range.first,
                                           count.below_range.second, count.meaning),
                       known ? State::kPassed : State::kError});
    }
  }
  if (outcome.path) add_steps(cases, *outcome.path, good);
  if (outcome.audit) {
    for (const AuditGap& gap : outcome.audit->gaps) {
      cases.push_back({fmt::format("from {} to {}", exact(gap.low), exact(gap.high)),
                       fmt::format("{} listed, {} counted", gap.listed, gap.counted), State::kFailed});
    }
  }
  if (outcome.located) {
    for (const Direction& direction : outcome.located->directions) {
      std::string name = title_of(direction.cause);
      if (!direction.nodes.empty()) name += ", " + dof_in_words(direction.nodes.front());
      cases.push_back(
          {name,
           fmt::format("{}: {} Remedy: {}", how_many(direction), direction.explanation, direction.remedy),
           direction.cause == Cause::kUnresolved ? State::kError : State::kFailed});
    }
  }
  return cases;
}

}  // namespace

std::string to_junit(const Outcome& outcome, bool good, bool unresolved) {
  const auto cases = cases_of(outcome, good, unresolved);
  int failures = 0, errors = 0;
  for (const Case& one : cases) {
    failures += one.state == State::kFailed ? 1 : 0;
    errors += one.state == State::kError ? 1 : 0;
  }
  const std::string suite = "stanchion." + outcome.command;
  const std::string title =
      outcome.title.value_or(outcome.inputs.empty() ? std::string() : outcome.inputs.front().path);
  std::string xml = fmt::format(
      "<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n<testsuites>\n<testsuite name=\"{}\" tests=\"{}\" "
      "failures=\"{}\" errors=\"{}\" skipped=\"0\" time=\"{:.3f}\">\n",
      escaped(title.empty() ? suite : title), cases.size(), failures, errors, outcome.timings.total);
  for (const Case& one : cases) {
    xml += fmt::format("<testcase classname=\"{}\" name=\"{}\" time=\"{:.3f}\">", escaped(suite),
                       escaped(one.name), &one == cases.data() ? outcome.timings.total : 0.0);
    if (one.state == State::kPassed) {
      xml += fmt::format("<system-out>{}</system-out>", escaped(one.message));
    } else {
      xml += fmt::format("<{0} message=\"{1}\" type=\"{2}\">{1}</{0}>",
                         one.state == State::kFailed ? "failure" : "error", escaped(one.message),
                         one.state == State::kFailed ? "not-good" : "unresolved");
    }
    xml += "</testcase>\n";
  }
  return xml + "</testsuite>\n</testsuites>\n";
}

}  // namespace stanchion
