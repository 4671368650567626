#include "report/junit.hpp"

#include <fmt/format.h>

#include <algorithm>

#include "model/names.hpp"
#include "model/numbers.hpp"
#include "report/cause_words.hpp"
#include "report/markup.hpp"
#include "report/page.hpp"
#include "report/text_sections.hpp"

namespace stanchion {
namespace {

/// A case for every matrix of a load path; where the whole answer is what was expected, all of them are.
void add_steps(std::vector<JunitCase>& cases, const PathOutcome& path, bool good) {
  for (std::size_t k = 0; k < path.steps.size(); ++k) {
    const PathStep& step = path.steps[k];
    const bool known = step.verdict != Verdict::kUnresolved;
    cases.push_back({fmt::format("step {}, {}", k + 1, step.path),
                     fmt::format("{}: {} negative, {} zero, {} undecided", name_of(step.verdict),
                                 step.inertia.negative, step.inertia.zero, step.inertia.undecided),
                     !known                                               ? JunitState::kError
                     : good || step.verdict == Verdict::kPositiveDefinite ? JunitState::kPassed
                                                                          : JunitState::kFailed});
  }
}

std::vector<JunitCase> cases_of(const Outcome& outcome, bool good, bool unresolved) {
  Page page;
  write_answer(page, outcome);
  const std::string headline = page.blocks().empty() ? outcome.command : page.blocks().front().text;
  std::vector<JunitCase> cases{{outcome.command + " answers well", headline,
                                unresolved ? JunitState::kError
                                : good     ? JunitState::kPassed
                                           : JunitState::kFailed}};
  if (outcome.count) {
    for (const ShiftCount& count : outcome.count->counts) {
      const bool known = count.below.has_value() && count.level != Level::kNone;
      cases.push_back({"count at " + exact(count.shift),
                       known ? fmt::format("{} {}", *count.below, count.meaning)
                             : fmt::format("between {} and {} {}", count.below_range.first,
                                           count.below_range.second, count.meaning),
                       known ? JunitState::kPassed : JunitState::kError});
    }
  }
  if (outcome.path) add_steps(cases, *outcome.path, good);
  if (outcome.audit) {
    for (const AuditGap& gap : outcome.audit->gaps) {
      cases.push_back({fmt::format("from {} to {}", exact(gap.low), exact(gap.high)),
                       fmt::format("{} listed, {} counted", gap.listed, gap.counted), JunitState::kFailed});
    }
  }
  if (outcome.located) {
    for (const Direction& direction : outcome.located->directions) {
      std::string name = title_of(direction.cause);
      if (!direction.nodes.empty()) name += ", " + dof_in_words(direction.nodes.front());
      cases.push_back(
          {name,
           fmt::format("{}: {} Remedy: {}", how_many(direction), direction.explanation, direction.remedy),
           direction.cause == Cause::kUnresolved ? JunitState::kError : JunitState::kFailed});
    }
  }
  return cases;
}

std::string to_xml(const JunitCase& one, const std::string& suite, double seconds) {
  std::string xml = fmt::format("<testcase classname=\"{}\" name=\"{}\" time=\"{:.3f}\">", escaped(suite),
                                escaped(one.name), seconds);
  if (one.state == JunitState::kPassed) {
    xml += fmt::format("<system-out>{}</system-out>", escaped(one.message));
  } else {
    const bool failed = one.state == JunitState::kFailed;
    const std::string type = !one.type.empty() ? one.type : failed ? "not-good" : "unresolved";
    xml +=
        fmt::format("<{0} message=\"{1}\" type=\"{2}\">{3}</{0}>", failed ? "failure" : "error",
                    escaped(one.message), escaped(type), escaped(one.text.empty() ? one.message : one.text));
  }
  return xml + "</testcase>\n";
}

}  // namespace

std::string junit_document(const std::string& command, const std::string& title,
                           const std::vector<JunitCase>& cases, double seconds) {
  const std::string suite = "stanchion." + command;
  const auto in_state = [&cases](JunitState state) {
    return std::count_if(cases.begin(), cases.end(),
                         [state](const JunitCase& one) { return one.state == state; });
  };
  std::string xml = fmt::format(
      "<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n<testsuites>\n<testsuite name=\"{}\" tests=\"{}\" "
      "failures=\"{}\" errors=\"{}\" skipped=\"0\" time=\"{:.3f}\">\n",
      escaped(title.empty() ? suite : title), cases.size(), in_state(JunitState::kFailed),
      in_state(JunitState::kError), seconds);
  for (const JunitCase& one : cases) xml += to_xml(one, suite, &one == cases.data() ? seconds : 0.0);
  return xml + "</testsuite>\n</testsuites>\n";
}

std::string to_junit(const Outcome& outcome, bool good, bool unresolved) {
  const std::string title =
      outcome.title.value_or(outcome.inputs.empty() ? std::string() : outcome.inputs.front().path);
  return junit_document(outcome.command, title, cases_of(outcome, good, unresolved), outcome.timings.total);
}

}  // namespace stanchion
