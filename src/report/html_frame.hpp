// What every HTML page of ours has: head, title, mark, question, command, footer.
#pragma once

#include <optional>
#include <string>
#include <vector>

namespace stanchion {

/// A whole page that stands alone: it loads nothing and runs nothing. `body` lies between title and footer.
std::string html_page(const std::string& title, const std::optional<std::string>& reference,
                      const std::string& command, const std::string& body);

enum class Mark { kGood, kNotGood, kUnresolved, kNoAnswer };

/// A beam on two posts: level, come off, or not drawn to its end.
std::string verdict_mark(Mark mark);

struct QuestionAsked {
  std::string command;
  bool located = false, geometric = false, mass = false;
};

/// One sentence that ends with a question mark.
std::string question_in_words(const QuestionAsked& asked);

/// The command line, quoted for a shell where need be.
std::string command_to_html(const std::vector<std::string>& arguments);

/// A path that may go on in the next line after each folder.
std::string path_to_html(const std::string& path);

}  // namespace stanchion
