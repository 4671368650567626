#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "model/numbers.hpp"
#include "report/staircase_points.hpp"
#include "report/text_sections.hpp"

namespace stanchion {
namespace {

constexpr int kColumns = 72, kMostRows = 10;

/// A row for each height, top first; '_' where the count is known between shifts, ':' where it changes
/// somewhere.
void write_picture(Page& page, const std::vector<StaircasePoint>& points) {
  if (points.size() < 2 || !(points.back().shift > points.front().shift)) return;
  Index most = 0;
  for (const StaircasePoint& point : points) most = std::max(most, point.count);
  const int rows = std::min<int>(most, kMostRows);
  const auto row_of = [&](Index count) {
    return most == 0 ? 0 : static_cast<int>(std::lround(static_cast<double>(count) / most * rows));
  };
  const double low = points.front().shift, high = points.back().shift;
  const auto column_of = [&](double shift) {
    return std::clamp(static_cast<int>((shift - low) / (high - low) * kColumns), 0, kColumns - 1);
  };
  std::vector<std::string> lines(static_cast<std::size_t>(rows) + 1, std::string(kColumns, ' '));
  for (std::size_t i = 1; i < points.size(); ++i) {
    const StaircasePoint &a = points[i - 1], &b = points[i];
    const bool level = a.count == b.count;
    const int bottom = row_of(std::min(a.count, b.count)), top = row_of(std::max(a.count, b.count));
    for (int c = column_of(a.shift); c <= column_of(b.shift); ++c) {
      for (int r = bottom; r <= top; ++r) {
        char& cell = lines[static_cast<std::size_t>(r)][static_cast<std::size_t>(c)];
        if (!level || cell == ' ') cell = level ? '_' : ':';
      }
    }
  }
  page.blank();
  for (int r = rows; r >= 0; --r) {
    const auto count = static_cast<Index>(std::lround(static_cast<double>(most) * r / std::max(rows, 1)));
    page.line(fmt::format("  {:>7} |{}", grouped(count), lines[static_cast<std::size_t>(r)]));
  }
  const std::string left = fmt::format("{:.6g}", low), right = fmt::format("{:.6g}", high);
  page.line(fmt::format("          {}{:>{}}", left, right, kColumns + 1 - static_cast<int>(left.size())));
  page.line("          _ the count between two shifts    : it changes somewhere in there");
  page.blank();
}

std::string what(const CountOutcome& answer) {
  if (answer.counts.empty()) return "values";
  const std::string& meaning = answer.counts.front().meaning;
  if (meaning.rfind("critical factors", 0) == 0) return "critical factors";
  if (meaning.rfind("eigenvalues", 0) == 0) return "eigenvalues";
  return "negative directions";
}

/// No number at this shift: a range, or nothing.
bool is_open(const ShiftCount& count) {
  return !count.below || count.level == Level::kNone;
}

/// Whether the band around a shift reaches into the stretches beside it.
bool overlap(const std::vector<Jump>& jumps) {
  for (std::size_t k = 1; k < jumps.size(); ++k) {
    if (jumps[k].low < jumps[k - 1].high) return true;
  }
  return false;
}

void write_jumps(Page& page, const Outcome& outcome) {
  const std::vector<Jump>& jumps = outcome.sweep->jumps;
  const std::string who = what(*outcome.count);
  if (jumps.empty()) {
    const std::vector<ShiftCount>& counts = outcome.count->counts;
    const auto open = std::count_if(counts.begin(), counts.end(), is_open);
    if (open > 0) {
      page.sentence(
          fmt::format("No change of the number of {} is certain: it is known only as a range at {} of {}.",
                      who, open, counted(static_cast<Offset>(counts.size()), "shift")));
    } else if (who != "negative directions") {
      page.sentence(fmt::format("The count does not change: no {} in the range of the sweep.", who));
    } else {
      page.sentence(
          "The number of negative directions is the same at every shift of the sweep; in between it may "
          "differ, for this is no count of values.");
    }
    return;
  }
  Index sum = 0;
  for (const Jump& jump : jumps) sum += jump.count;
  page.sentence(fmt::format(
      "{} {} in {}.", grouped(sum), who,
      jumps.size() == 1 ? std::string("one stretch") : fmt::format("{} stretches", jumps.size())));
  page.blank();
  std::vector<std::vector<std::string>> rows{{"from", "to", "width", who}};
  for (const Jump& jump : jumps) {
    rows.push_back({exact(jump.low), exact(jump.high), rounded(jump.high - jump.low), grouped(jump.count)});
  }
  page.table(rows, 4);
  if (overlap(jumps)) {
    page.sentence(
        "Stretches overlap at a shift on a value: each value is counted once, and may lie in both of them.");
  }
}

}  // namespace

void write_sweep(Page& page, const Outcome& outcome) {
  const CountOutcome& answer = *outcome.count;
  for (const Contradiction& pair : outcome.sweep->contradictions) {
    page.sentence(
        fmt::format("DEFECT: the counts at {} and {} contradict each other; nothing here is to be trusted.",
                    exact(pair.shift), exact(pair.other_shift)));
  }
  const bool all = std::none_of(answer.counts.begin(), answer.counts.end(), is_open);
  std::string who = what(answer);
  who[0] = static_cast<char>(who[0] - 'a' + 'A');
  page.sentence(fmt::format("{} counted at {}, {}.", who,
                            counted(static_cast<Offset>(answer.counts.size()), "shift"),
                            all ? "every count certified" : "not every count certified"));
  const bool values = what(answer) != "negative directions";
  if (values) write_jumps(page, outcome);
  for (const std::string& sentence : answer.sentences) page.sentence(sentence);
  if (!values) write_jumps(page, outcome);  // what the numbers are not is said before them
  write_picture(page, known_points(answer.counts));
  write_counts_table(page, answer, outcome.rows_analysed);
  if (outcome.sweep->resumed > 0) {
    page.sentence(fmt::format("{} from an earlier run.", counted(outcome.sweep->resumed, "count")));
  }
}

}  // namespace stanchion
