#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <string_view>

#include "model/numbers.hpp"
#include "report/text_sections.hpp"

namespace stanchion {
namespace {

std::string count_in_words(const ShiftCount& count) {
  if (count.below) return grouped(*count.below);
  return fmt::format("{} to {}", grouped(count.below_range.first), grouped(count.below_range.second));
}

/// How near to the shift an eigenvalue would have to lie for the count to be off; "-" when nothing can.
std::string margin(const ShiftCount& count) {
  if (!count.holds_outside) return "-";
  return rounded(std::max(std::abs(count.holds_outside->first - count.shift),
                          std::abs(count.holds_outside->second - count.shift)));
}

/// "an eigenvalue lies within 3e-09 of this shift": why only a range is known.
std::string what_lies_near(const ShiftCount& count) {
  const bool factors = count.meaning.rfind("critical factors", 0) == 0;
  const Index many = count.below_range.second - count.below_range.first;
  const std::string who = many == 1
                              ? (factors ? "a critical factor lies" : "an eigenvalue lies")
                              : grouped(many) + (factors ? " critical factors lie" : " eigenvalues lie");
  return who + " within " + margin(count) + " of this shift";
}

std::string backing(const ShiftCount& count, Index rows_counted) {
  const Index spread = count.below_range.second - count.below_range.first;
  if (count.level == Level::kNone && spread < rows_counted) {
    if (!count.holds_outside) return "only the range; no certificate for one number";
    return backing_in_words(count.certificate.level, count.certificate.failure_probability) +
           " for the range; " + what_lies_near(count);
  }
  std::string text;
  if (count.level == Level::kStatistical && count.failure_probability) {
    text = "statistics, wrong with probability at most " + rounded(*count.failure_probability);
  } else {
    text = backing_in_words(count.level, count.failure_probability);
  }
  if (count.method == "offsets") {
    text += count.certificate.runs.size() == 1 ? ", from one factor" : ", from factors on both sides";
  }
  if (count.no_eigenvalue_within) text += "; none within " + rounded(*count.no_eigenvalue_within);
  const auto& precision = count.certificate.precision;
  if (precision && *precision != "double") text += ", in " + *precision + " precision";
  return text;
}

bool any_relative(const std::vector<ShiftCount>& counts) {
  return std::any_of(counts.begin(), counts.end(),
                     [](const ShiftCount& count) { return count.method == "relative"; });
}

bool same_meaning(const std::vector<ShiftCount>& counts) {
  return std::all_of(counts.begin(), counts.end(),
                     [&](const ShiftCount& count) { return count.meaning == counts.front().meaning; });
}

bool any_margin(const std::vector<ShiftCount>& counts) {
  return std::any_of(counts.begin(), counts.end(),
                     [](const ShiftCount& count) { return count.holds_outside.has_value(); });
}

bool any_exact_but_for_margin(const std::vector<ShiftCount>& counts) {
  return std::any_of(counts.begin(), counts.end(),
                     [](const ShiftCount& count) { return count.below && count.holds_outside; });
}

/// The answer itself when a single shift was asked; else whether all were answered.
std::string headline(const std::vector<ShiftCount>& counts) {
  const bool all = std::all_of(counts.begin(), counts.end(), [](const ShiftCount& count) {
    return count.below.has_value() && count.level != Level::kNone;
  });
  if (counts.size() == 1 && all) {
    return fmt::format("At {}: {} {}.", exact(counts[0].shift), grouped(*counts[0].below), counts[0].meaning);
  }
  if (counts.size() == 1 && counts[0].holds_outside) {
    const auto [least, most] = counts[0].below_range;
    return fmt::format("At {}: between {} and {} {}; {}.", exact(counts[0].shift), grouped(least),
                       grouped(most), counts[0].meaning, what_lies_near(counts[0]));
  }
  const std::string meaning = same_meaning(counts) ? ": " + counts.front().meaning : "";
  return (all ? fmt::format("All {} counts are certified", counts.size())
              : "Not every count could be certified") +
         meaning + ".";
}

/// Shift, count, margin (if any has one), backing, and what is counted (if that differs).
std::vector<std::vector<std::string>> rows_of(const std::vector<ShiftCount>& counts, Index rows_counted) {
  const bool margins = any_margin(counts), meanings = !same_meaning(counts);
  const auto row = [&](std::string shift, std::string count, std::string margin, std::string backing,
                       std::string meaning) {
    std::vector<std::string> cells{std::move(shift), std::move(count)};
    if (margins) cells.push_back(std::move(margin));
    cells.push_back(std::move(backing));
    if (meanings) cells.push_back(std::move(meaning));
    return cells;
  };
  // On either side of 0: what is counted stands above the column, from where to where in it.
  constexpr std::string_view kBetween = " between ";
  const bool sides = std::all_of(counts.begin(), counts.end(), [&](const ShiftCount& count) {
    return count.meaning.find(kBetween) != std::string::npos;
  });
  const std::string head =
      sides ? counts.front().meaning.substr(0, counts.front().meaning.find(kBetween)) : "counted";
  const auto what = [&](const std::string& meaning) {
    return sides ? "between " + meaning.substr(meaning.find(kBetween) + kBetween.size()) : meaning;
  };
  std::vector<std::vector<std::string>> rows{row("shift", "count", "margin", "backed by", head)};
  for (const ShiftCount& count : counts) {
    rows.push_back(row(exact(count.shift), count_in_words(count), margin(count), backing(count, rows_counted),
                       what(count.meaning)));
  }
  return rows;
}

}  // namespace

void write_counts_table(Page& page, const CountOutcome& answer, Index rows_counted) {
  page.table(rows_of(answer.counts, rows_counted), any_margin(answer.counts) ? 3 : 2);
  if (any_exact_but_for_margin(answer.counts)) {
    page.sentence("A count is exact unless one of what is counted lies within the margin of its shift.");
  }
  if (any_relative(answer.counts)) {
    page.sentence("Statistics: the factor was held against the matrix itself, on random vectors.");
  }
}

void write_count(Page& page, const Outcome& outcome) {
  const CountOutcome& answer = *outcome.count;
  if (answer.counts.empty()) {
    page.sentence("No shift was asked.");
    return;
  }
  page.sentence(headline(answer.counts));
  for (const std::string& sentence : answer.sentences) page.sentence(sentence);
  page.blank();
  write_counts_table(page, answer, outcome.rows_analysed);
}

}  // namespace stanchion
