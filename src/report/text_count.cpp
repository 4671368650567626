#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "report/numbers.hpp"
#include "report/text_sections.hpp"

namespace stanchion {
namespace {

std::string count_in_words(const ShiftCount& count) {
  if (count.below) return grouped(*count.below);
  return fmt::format("{} to {}", grouped(count.below_range.first), grouped(count.below_range.second));
}

std::string backing(const ShiftCount& count) {
  std::string text = backing_in_words(count.level, count.failure_probability);
  if (count.method == "offsets") text += ", factors on both sides";
  if (count.method == "relative") text += ", one factor compared with the matrix";
  if (count.certificate.precision == "single") text += ", in single precision";
  return text;
}

/// How near to the shift an eigenvalue would have to lie for the count to be off; "-" when nothing can.
std::string margin(const ShiftCount& count) {
  if (!count.holds_outside) return "-";
  return rounded(std::max(std::abs(count.holds_outside->first - count.shift),
                          std::abs(count.holds_outside->second - count.shift)));
}

bool same_meaning(const std::vector<ShiftCount>& counts) {
  return std::all_of(counts.begin(), counts.end(),
                     [&](const ShiftCount& count) { return count.meaning == counts.front().meaning; });
}

/// One sentence when a single shift was asked: the answer before the table.
std::string headline(const std::vector<ShiftCount>& counts) {
  const bool all = std::all_of(counts.begin(), counts.end(), [](const ShiftCount& count) {
    return count.below.has_value() && count.level != Level::kNone;
  });
  const std::string meaning = same_meaning(counts) ? counts.front().meaning : "counts";
  if (counts.size() == 1 && all) {
    return fmt::format("At {}: {} {}.", exact(counts[0].shift), grouped(*counts[0].below), meaning);
  }
  if (all) return fmt::format("All {} counts are certified: {}.", counts.size(), meaning);
  return fmt::format("Not every count could be certified: {}.", meaning);
}

std::vector<std::vector<std::string>> rows_of(const std::vector<ShiftCount>& counts, bool one_meaning) {
  std::vector<std::vector<std::string>> rows{{"shift", "count", "margin", "backed by"}};
  for (const ShiftCount& count : counts) {
    const std::string meaning = one_meaning ? "" : "; " + count.meaning;
    rows.push_back({exact(count.shift), count_in_words(count), margin(count), backing(count) + meaning});
  }
  return rows;
}

}  // namespace

void write_count(Page& page, const Outcome& outcome) {
  const CountOutcome& answer = *outcome.count;
  if (answer.counts.empty()) {
    page.sentence("No shift was asked.");
    return;
  }
  const bool one_meaning = same_meaning(answer.counts);
  page.sentence(headline(answer.counts));
  for (const std::string& sentence : answer.sentences) page.sentence(sentence);
  page.blank();
  page.table(rows_of(answer.counts, one_meaning));
  const bool margins = std::any_of(answer.counts.begin(), answer.counts.end(),
                                   [](const ShiftCount& count) { return count.holds_outside.has_value(); });
  if (margins)
    page.sentence("A count is exact unless one of what is counted lies within the margin of its shift.");
}

}  // namespace stanchion
