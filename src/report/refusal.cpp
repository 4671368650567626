#include "report/refusal.hpp"

#include <fmt/format.h>

#include <algorithm>

#include "report/html_frame.hpp"
#include "report/html_parts.hpp"
#include "report/junit.hpp"
#include "report/markup.hpp"
#include "report/page.hpp"

namespace stanchion {
namespace {

const char* what_happened(const Refusal& refusal) {
  if (refusal.answered) return "The answer was reached, but not all of it could be written.";
  switch (refusal.why.kind()) {
    case StatusKind::kBadUsage:
      return "The question was refused as typed.";
    case StatusKind::kBadInput:
      return "The input was refused.";
    case StatusKind::kResourceLimit:
      return "A limit was reached before there was an answer.";
    case StatusKind::kInterrupted:
      return "The run was stopped before there was an answer.";
    default:
      return "The program failed.";
  }
}

std::string title_of(const Refusal& refusal) {
  if (refusal.title) return *refusal.title;
  return refusal.inputs.empty() ? "No answer" : refusal.inputs.front().path;
}

bool names(const Refusal& refusal, const char* role) {
  return std::any_of(refusal.inputs.begin(), refusal.inputs.end(),
                     [&](const TableRecord& input) { return input.role == role; });
}

std::string reason_to_html(const Refusal& refusal) {
  Page page;
  page.row("what", refusal.why.message());
  if (!refusal.why.place().empty()) page.row("where", refusal.why.place());
  if (!refusal.why.remedy().empty()) page.row("remedy", refusal.why.remedy());
  page.row("code", refusal.why.code());
  page.row("exit code", std::to_string(refusal.exit_code));
  return blocks_to_html("Why", page.blocks(), 0, page.blocks().size());
}

std::string question_to_html(const Refusal& refusal) {
  const auto& typed = refusal.arguments;
  const bool located = std::find(typed.begin(), typed.end(), "--locate") != typed.end();
  const std::string question = question_in_words({refusal.command, located, names(refusal, "geometric"),
                                                  names(refusal, "mass"), names(refusal, "step")});
  return fmt::format("<dl>\n<dt>question</dt><dd>{}</dd>\n<dt>as typed</dt><dd>{}</dd>\n</dl>\n",
                     escaped(question), command_to_html(typed));
}

std::string inputs_to_html(const Refusal& refusal) {
  if (refusal.inputs.empty()) return "";
  std::string html =
      begin_table("Inputs", "inputs", "<th scope=\"col\">input</th><th scope=\"col\">file</th>");
  for (const TableRecord& input : refusal.inputs)
    html += fmt::format("<tr><td>{}</td><td>{}</td></tr>\n", escaped(input.role), path_to_html(input.path));
  return html + end_table() +
         "<p>As named; without an answer no digest binds this page to what they hold.</p>\n";
}

std::string not_checked_to_html(const Refusal& refusal) {
  std::string html =
      "<ul>\n<li>Everything that was asked: no verdict, no count and no cause follows from this page.</li>\n";
  if (refusal.why.kind() == StatusKind::kBadInput)
    html +=
        "<li>Whether the files hold other faults: reading ends at the first that cannot be passed "
        "over.</li>\n";
  return html + "</ul>\n";
}

}  // namespace

std::string refusal_to_html(const Refusal& refusal) {
  std::string html = "<div class=\"verdict\">" + verdict_mark(VerdictMark::kNoAnswer) + "<div>\n";
  html += fmt::format("<p class=\"lead\">No answer: {}</p>\n", headline(refusal.why.message()));
  html += fmt::format("<p>{}</p>\n", what_happened(refusal));
  html += fmt::format(
      "<p class=\"stand\">{}</p></div></div>\n",
      refusal.answered ? "This page certifies nothing." : "Nothing was counted, and nothing is certified.");
  html += band("Why", reason_to_html(refusal));
  html += band("Question", question_to_html(refusal));
  html += band("Inputs", inputs_to_html(refusal));
  html += band("Not checked", not_checked_to_html(refusal));
  return html_page(title_of(refusal), refusal.reference, refusal.command, html);
}

std::string refusal_to_junit(const Refusal& refusal) {
  const bool named = refusal.title || !refusal.inputs.empty();
  std::string text = refusal.why.message();
  if (!refusal.why.place().empty()) text += "\nwhere: " + refusal.why.place();
  if (!refusal.why.remedy().empty()) text += "\nremedy: " + refusal.why.remedy();
  text += fmt::format("\ncode: {}\nexit code: {}", refusal.why.code(), refusal.exit_code);
  return junit_document(refusal.command, named ? title_of(refusal) : "",
                        {{refusal.command + " answers well", refusal.why.message(), JunitState::kError,
                          refusal.why.code(), text}},
                        0);
}

}  // namespace stanchion
