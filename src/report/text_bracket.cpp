#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <utility>

#include "model/frequency.hpp"
#include "model/input_files.hpp"
#include "model/numbers.hpp"
#include "report/text_sections.hpp"

namespace stanchion {
namespace {

/// "critical factor" or "eigenvalue".
std::string noun_of(const Outcome& outcome) {
  return has_matrix(outcome, "geometric") ? "critical factor" : "eigenvalue";
}

std::string end_of(double value, bool hertz) {
  if (hertz && value < 0) return "s = " + exact(value);  // no frequency
  if (hertz) return fmt::format("{:.8g} Hz", hertz_of(value));
  return exact(value);
}

std::string range_in_words(const CountedRange& range, bool hertz) {
  if (!std::isfinite(range.from)) return "below " + end_of(range.to, hertz);
  return fmt::format("between {} and {}", end_of(range.from, hertz), end_of(range.to, hertz));
}

/// The digits that the two ends of an interval share, and one or two more.
int shared_digits(double value, double low, double high) {
  return std::clamp(static_cast<int>(std::ceil(std::log10(std::fabs(value) / (high - low)))) + 1, 2, 17);
}

std::string digits_of(double value, double low, double high) {
  if (!(high > low) || value == 0) return fmt::format("{:.10g}", value);
  return fmt::format("{:.{}g}", value, shared_digits(value, low, high));
}

/// The ends of an interval, rounded outwards to what its width makes worth reading.
std::pair<std::string, std::string> ends_of(double value, double low, double high) {
  if (!(high > low) || value == 0) return {exact(low), exact(high)};
  const int digits = std::max(shared_digits(value, low, high) + 1, 4);
  return {rounded_down(low, digits), rounded_up(high, digits)};
}

std::string proof_in_words(const CriticalValue& value) {
  std::string text = backing_in_words(value.level, value.failure_probability);
  text += value.proof == "residual" ? ", residual interval and counts" : ", counts";
  return text;
}

void write_headline(Page& page, const Outcome& outcome) {
  const BracketOutcome& bracket = *outcome.bracket;
  const std::string noun = noun_of(outcome);
  if (!bracket.complete || !bracket.complete->count) {
    page.sentence(bracket.critical.empty() ? fmt::format("No {} could be bracketed.", noun)
                                           : fmt::format("{} bracketed; that these are all is not shown.",
                                                         counted(static_cast<Offset>(bracket.critical.size()),
                                                                 noun + " or group")));
    return;
  }
  const CountedRange& range = *bracket.complete;
  page.sentence(fmt::format("{} {}, certified.",
                            *range.count == 0 ? "No " + noun : counted(*range.count, noun),
                            range_in_words(range, bracket.in_hertz)));
  if (bracket.more_than_asked > 0) {
    page.sentence(fmt::format("{} more than asked: the last ones are not told apart.",
                              grouped(bracket.more_than_asked)));
  }
}

}  // namespace

void write_values(Page& page, const std::vector<CriticalValue>& values, bool hertz) {
  // One backing for all is said once, below the table.
  const bool one = std::all_of(values.begin(), values.end(), [&](const CriticalValue& value) {
    return proof_in_words(value) == proof_in_words(values.front());
  });
  std::vector<std::vector<std::string>> rows;
  std::vector<std::string> heading{"value", "low", "high", "times"};
  if (!one) heading.emplace_back("backed by");
  if (hertz) heading.insert(heading.begin(), "Hz");
  rows.push_back(heading);
  for (const CriticalValue& value : values) {
    const auto [low, high] = ends_of(value.value, value.low, value.high);
    std::vector<std::string> row{
        digits_of(value.value, value.low, value.high), low, high,
        grouped(value.multiplicity) + (value.rigid_body ? ", rigid body or mechanism" : "")};
    if (!one) row.push_back(proof_in_words(value));
    if (hertz) {
      row.insert(row.begin(), digits_of(hertz_of(value.value), hertz_of(value.low), hertz_of(value.high)));
    }
    rows.push_back(std::move(row));
  }
  page.table(rows, hertz ? 5 : 4);
  if (one && !values.empty()) page.sentence("Backed by " + proof_in_words(values.front()) + ".");
}

void write_bracket(Page& page, const Outcome& outcome) {
  const BracketOutcome& bracket = *outcome.bracket;
  write_headline(page, outcome);
  for (const std::string& sentence : bracket.sentences) page.sentence(sentence);
  if (bracket.critical.empty()) return;
  page.blank();
  write_values(page, bracket.critical, bracket.in_hertz);
}

}  // namespace stanchion
