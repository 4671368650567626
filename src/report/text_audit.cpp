#include <fmt/format.h>

#include <cmath>

#include "model/frequency.hpp"
#include "model/numbers.hpp"
#include "report/text_sections.hpp"

namespace stanchion {
namespace {

std::string verdict_in_words(const AuditOutcome& audit) {
  switch (audit.verdict) {
    case AuditVerdict::kComplete:
      return "The list is complete";
    case AuditVerdict::kMissing:
      return "The list is NOT complete: values are missing";
    case AuditVerdict::kSurplus:
      return "The list is NOT right: it holds values that do not exist";
    case AuditVerdict::kMissingAndSurplus:
      return "The list is NOT right: values are missing, and it holds values that do not exist";
    case AuditVerdict::kUnresolved:
      break;
  }
  return "The list could not be judged";
}

std::string end_of(double value, bool hertz) {
  return hertz ? fmt::format("{:.10g} Hz", hertz_of(value)) : exact(value);
}

std::string list_of(const std::vector<std::string>& labels) {
  constexpr std::size_t kMost = 6;
  std::string text;
  for (std::size_t k = 0; k < labels.size() && k < kMost; ++k) text += (k > 0 ? ", " : "") + labels[k];
  if (labels.size() > kMost) text += fmt::format(", and {} more", labels.size() - kMost);
  return text;
}

}  // namespace

void write_audit(Page& page, const Outcome& outcome) {
  const AuditOutcome& audit = *outcome.audit;
  const CountedRange& range = audit.range;
  const std::string to = end_of(range.to, audit.in_hertz);
  const std::string where = std::isfinite(range.from)
                                ? fmt::format("between {} and {}", end_of(range.from, audit.in_hertz), to)
                                : fmt::format("up to {}", to);
  page.sentence(fmt::format("{}: {} listed {}, {} counted.", verdict_in_words(audit), grouped(audit.listed),
                            where, range.count ? grouped(*range.count) : "an unknown number"));
  for (const std::string& sentence : audit.sentences) page.sentence(sentence);
  if (audit.outside > 0)
    page.sentence(fmt::format("{} outside the range left out.", counted(audit.outside, "value")));
  if (!audit.gaps.empty()) {
    page.blank();
    std::vector<std::vector<std::string>> rows{{"from", "to", "listed", "counted", "what is listed"}};
    for (const AuditGap& gap : audit.gaps) {
      rows.push_back({std::isfinite(gap.low) ? end_of(gap.low, audit.in_hertz) : "",
                      end_of(gap.high, audit.in_hertz), grouped(gap.listed), grouped(gap.counted),
                      gap.labels.empty() ? "nothing" : list_of(gap.labels)});
    }
    page.table(rows, 4);
  }
  page.blank();
  page.row("backed by", backing_in_words(range.level, range.failure_probability) +
                            (audit.proof.empty() ? "" : "; " + audit.proof));
  if (!audit.missing.empty()) {
    page.title("What the gaps hold");
    write_values(page, audit.missing, audit.in_hertz);
  }
}

}  // namespace stanchion
