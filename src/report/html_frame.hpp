// What every HTML page of ours has: head, title, mark, question, command, footer.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "report/chart.hpp"

namespace stanchion {

/// A whole page that stands alone: it loads nothing and runs nothing. `body` lies between title and footer.
std::string html_page(const std::string& title, const std::optional<std::string>& reference,
                      const std::string& command, const std::string& body);

/// A chart drawn for a wide window and for paper, and one for a narrow window; nothing where it draws
/// nothing.
template <class Draw>
std::string in_both_widths(const Draw& draw) {
  const std::string wide = draw(ChartWidth::kWide);
  if (wide.empty()) return "";
  return "<div class=\"wide\">" + wide + "</div><div class=\"narrow\">" + draw(ChartWidth::kNarrow) +
         "</div>\n";
}

enum class VerdictMark { kGood, kNotGood, kUnresolved, kNoAnswer };

/// A beam on two posts: level, come off, or not drawn to its end.
std::string verdict_mark(VerdictMark mark);

struct QuestionAsked {
  std::string command;
  bool located = false, geometric = false, mass = false, steps = false;
};

/// One sentence that ends with a question mark.
std::string question_in_words(const QuestionAsked& asked);

/// The command line, quoted for a shell where need be.
std::string command_to_html(const std::vector<std::string>& arguments);

/// Opens a table called `name` of the page's class `kind` (may be empty), in a box that scrolls, by keys too,
/// where the window is too narrow for it; `head` are the cells of its first row, again on every sheet of
/// paper.
std::string begin_table(const std::string& name, const std::string& kind, const std::string& head);
std::string end_table();

}  // namespace stanchion
