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
  if (count.certificate.precision) text += ", " + *count.certificate.precision + " precision";
  return text;
}

std::string limits(const ShiftCount& count) {
  if (!count.holds_outside) return "";
  const double reach = std::max(std::abs(count.holds_outside->first - count.shift),
                                std::abs(count.holds_outside->second - count.shift));
  return fmt::format("; exact unless one lies within {} of it", rounded(reach));
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
  std::vector<std::vector<std::string>> rows{{"shift", "count", "backed by"}};
  for (const ShiftCount& count : answer.counts) {
    std::string last = backing(count) + limits(count);
    if (!one_meaning) last = count.meaning + "; " + last;
    rows.push_back({exact(count.shift), count_in_words(count), last});
  }
  page.table(rows);
}

}  // namespace stanchion
