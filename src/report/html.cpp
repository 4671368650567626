#include "report/html.hpp"

#include <fmt/format.h>

#include <algorithm>

#include "model/input_files.hpp"
#include "model/numbers.hpp"
#include "report/answer_svg.hpp"
#include "report/cause_words.hpp"
#include "report/html_frame.hpp"
#include "report/html_parts.hpp"
#include "report/markup.hpp"
#include "report/staircase_svg.hpp"
#include "report/text_sections.hpp"

namespace stanchion {
namespace {

/// Level, risk and digits in one sentence.
std::string standing(const Outcome& outcome) {
  Level level = Level::kProved;
  bool any = false;
  const auto weigh = [&](Level one) {
    level = any && level < one ? level : one;
    any = true;
  };
  if (outcome.check) weigh(outcome.check->certificate.level);
  if (outcome.count) {
    for (const ShiftCount& count : outcome.count->counts) weigh(count.level);
  }
  if (outcome.bracket) {
    weigh(outcome.bracket->complete ? outcome.bracket->complete->level : Level::kNone);
    for (const CriticalValue& value : outcome.bracket->critical) weigh(value.level);
  }
  if (outcome.audit) weigh(outcome.audit->range.level);
  if (outcome.path) {
    for (const PathStep& step : outcome.path->steps) weigh(step.certificate.level);
  }
  std::string text;
  if (any) {
    text = level == Level::kProved        ? "Backed by proof throughout"
           : level == Level::kStatistical ? "Backed by statistics where not by proof"
                                          : "Not certified in every part";
    text += outcome.risk > 0
                ? fmt::format("; the risk that any statement is wrong is at most {} (allowed: {})",
                              rounded(outcome.risk), rounded(outcome.risk_allowed))
                : "; no statement rests on chance";
  }
  if (outcome.forecast && !any) return "Nothing was factored: figures from the pattern alone.";
  text += text.empty() ? "The numbers of the input" : "; the numbers of the input";
  text += outcome.digits ? fmt::format(" count to {} decimal digits.", *outcome.digits) : " count as exact.";
  return text;
}

std::string question_of(const Outcome& outcome) {
  return question_in_words({outcome.command, outcome.located.has_value(), has_matrix(outcome, "geometric"),
                            has_matrix(outcome, "mass"), outcome.path.has_value()});
}

std::string question_to_html(const Outcome& outcome) {
  std::string rows;
  const auto row = [&rows](const char* label, const std::string& text) {
    rows += fmt::format("<dt>{}</dt><dd>{}</dd>\n", label, text);
  };
  row("question", escaped(question_of(outcome)));
  row("as typed", command_to_html(outcome.arguments));
  if (has_matrix(outcome, "geometric")) {
    const bool minus =
        std::find(outcome.arguments.begin(), outcome.arguments.end(), "minus") != outcome.arguments.end();
    row("sign of G", minus ? "K - f G: the file was written for the minus sign" : "K + f G");
  }
  if (outcome.count && !outcome.count->counts.empty()) {
    const auto [low, high] =
        std::minmax_element(outcome.count->counts.begin(), outcome.count->counts.end(),
                            [](const ShiftCount& a, const ShiftCount& b) { return a.shift < b.shift; });
    row("range", fmt::format("from {} to {}", exact(low->shift), exact(high->shift)));
  }
  row("equations", fmt::format("{} in the file, {} struck out, {} analysed",
                               grouped(Offset{outcome.rows_analysed} + outcome.rows_struck),
                               grouped(outcome.rows_struck), grouped(outcome.rows_analysed)));
  if (outcome.check && outcome.check->constrained)
    row("constrained", fmt::format("by {}", counted(outcome.check->constrained->multipliers, "multiplier")));
  return band("Question", "<dl>\n" + rows + "</dl>\n");
}

/// The answer as a chart, where it has one.
std::string chart_of(const Outcome& outcome, ChartWidth size) {
  if (outcome.audit) return audit_svg(outcome, size);
  if (outcome.path) return path_svg(outcome, size);
  if (outcome.sweep) return staircase_svg(outcome, false, size);
  if (!outcome.count || outcome.count->counts.size() < 2) return "";
  std::vector<std::pair<double, Index>> steps;
  for (const ShiftCount& count : outcome.count->counts)
    steps.emplace_back(count.shift, count.below.value_or(count.below_range.first));
  std::sort(steps.begin(), steps.end());
  constexpr double kHeight = 200, kLeft = 46, kBase = 164, kTop = 22;
  const double width = size == ChartWidth::kWide ? 640 : 360;
  const double low = std::min(0.0, steps.front().first), high = std::max(0.0, steps.back().first);
  Index most = 1;
  for (const auto& step : steps) most = std::max(most, step.second);
  const auto x = [&](double s) {
    return kLeft + (width - 2 * kLeft) * (high > low ? (s - low) / (high - low) : 0.5);
  };
  const auto y = [&](Index n) { return kBase - (kBase - kTop) * n / most; };
  std::string svg = fmt::format(
      "<svg class=\"chart\" viewBox=\"0 0 {:.0f} {:.0f}\" role=\"img\" aria-label=\"Counts over shifts\">\n",
      width, kHeight);
  svg += fmt::format("<path class=\"c-axis\" d=\"M{:.0f} {:.0f}H{:.0f}\"/>\n", kLeft, kBase, width - kLeft);
  double label_x = -100;
  for (std::size_t k = 0; k < steps.size(); ++k) {
    const auto& [shift, count] = steps[k];
    const bool crowded = k + 1 < steps.size() && x(steps[k + 1].first) - x(shift) < 12;  // by the next stem
    svg += fmt::format(
        "<path class=\"c-step\" d=\"M{0:.1f} {1:.1f}V{2:.1f}\"/><circle class=\"c-bar\" cx=\"{0:.1f}\" "
        "cy=\"{2:.1f}\" r=\"4\"/>\n",
        x(shift), kBase, y(count));
    if (x(shift) - label_x < 34) continue;
    label_x = x(shift);
    svg += fmt::format(
        "<text class=\"c-small\" x=\"{0:.1f}\" y=\"{1:.1f}\" text-anchor=\"{5}\">{2}</text><text "
        "class=\"c-small\" x=\"{0:.1f}\" "
        "y=\"{3:.0f}\" text-anchor=\"middle\">{4:.4g}</text>\n",
        x(shift), y(count) - 8, count, kBase + 16, shift, crowded ? "end" : "middle");
  }
  return svg + fmt::format(
                   "<text class=\"c-small\" x=\"{:.0f}\" y=\"{:.0f}\" text-anchor=\"middle\">shift; above it "
                   "the count</text></svg>\n",
                   width / 2, kHeight - 4);
}

std::string inputs_to_html(const Outcome& outcome) {
  std::string html =
      begin_table("Inputs", "inputs",
                  "<th scope=\"col\">input</th><th scope=\"col\">file</th><th scope=\"col\" "
                  "class=\"right\">equations</th><th scope=\"col\" class=\"right\">entries</th>"
                  "<th scope=\"col\">SHA-256</th>");
  for (const InputRecord& input : outcome.inputs) {
    const bool first_step = outcome.path && &input == &outcome.inputs.front();
    html += fmt::format(
        "<tr><td>{}{}{}</td><td>{}</td><td class=\"right\">{}</td><td class=\"right\">{}</td><td "
        "class=\"digest\">{}</td></tr>\n",
        escaped(input.role), first_step ? ", step 1" : "",
        input.factor ? ", times " + exact(*input.factor) : "", path_to_html(input.path), grouped(input.rows),
        grouped(input.entries), escaped(input.sha256));
  }
  const auto file = [&](const std::string& role, const std::string& path, const std::string& sha256) {
    html += fmt::format("<tr><td>{}</td><td>{}</td><td></td><td></td><td class=\"digest\">{}</td></tr>\n",
                        escaped(role), path_to_html(path), escaped(sha256));
  };
  // The first step of a load path is the stiffness above.
  for (std::size_t k = 1; outcome.path && k < outcome.path->steps.size(); ++k) {
    const PathStep& step = outcome.path->steps[k];
    file("step " + std::to_string(k + 1), step.path, step.sha256);
  }
  for (const TableRecord& table : outcome.tables) file(table.role, table.path, table.sha256);
  html += end_table();
  Page page;
  write_provenance(page, outcome);
  return html + blocks_to_html("Work", page.blocks(), outcome.inputs.size(), page.blocks().size());
}

}  // namespace

std::string to_html(const Outcome& outcome, bool good, bool unresolved) {
  Page answer;
  write_answer(answer, outcome);
  const auto& blocks = answer.blocks();
  std::size_t lead = 0;  // the sentences that open the answer
  while (lead < blocks.size() && blocks[lead].kind == Page::Kind::kSentence) ++lead;
  const std::string title =
      outcome.title.value_or(outcome.inputs.empty() ? std::string("Result") : outcome.inputs.front().path);

  std::string html;
  html += "<div class=\"verdict\">" +
          verdict_mark(unresolved ? VerdictMark::kUnresolved
                       : good     ? VerdictMark::kGood
                                  : VerdictMark::kNotGood) +
          "<div>\n";
  for (std::size_t k = 0; k < lead; ++k) {
    html += k == 0 ? fmt::format("<p class=\"lead\">{}</p>\n", headline(blocks[k].text))
                   : fmt::format("<p>{}</p>\n", flowing(blocks[k].text));
  }
  if (outcome.located) html += fmt::format("<p>{}</p>\n", flowing(location_headline(*outcome.located)));
  html += fmt::format("<p class=\"stand\">{}</p></div></div>\n", flowing(standing(outcome)));
  html += question_to_html(outcome);
  if (outcome.located) html += band("Where and why", causes_to_html(*outcome.located));
  // What follows up to the first title belongs to the answer; titles open sections of their own.
  std::string heading = "Answer";
  std::string chart = in_both_widths([&](ChartWidth width) { return chart_of(outcome, width); });
  for (std::size_t k = lead; k < blocks.size();) {
    std::size_t end = k;
    while (end < blocks.size() && blocks[end].kind != Page::Kind::kTitle) ++end;
    html += band(heading, chart + blocks_to_html(heading, blocks, k, end));
    chart.clear();
    if (end < blocks.size()) heading = blocks[end].text;
    k = end + 1;
  }
  if (outcome.located) {
    html += band("Local accuracy", accuracy_to_html(*outcome.located));
    html += band("Connected parts", parts_to_html(*outcome.located));
    html += band("Mass", mass_to_html(*outcome.located));
  }
  Page warnings;
  write_warnings(warnings, outcome.warnings);
  html += band("Warnings", blocks_to_html("Warnings", warnings.blocks(), 0, warnings.blocks().size()));
  html += band("Inputs, work, time", inputs_to_html(outcome));
  std::string open;
  for (const std::string& sentence : outcome.not_checked) open += "<li>" + flowing(sentence) + "</li>\n";
  html += band("Not checked", open.empty() ? open : "<ul>\n" + open + "</ul>\n");
  return html_page(title, outcome.reference, outcome.command, html);
}

}  // namespace stanchion
