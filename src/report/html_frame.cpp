#include "report/html_frame.hpp"

#include <fmt/format.h>

#include "model/version.hpp"
#include "report/html_style.hpp"
#include "report/markup.hpp"

namespace stanchion {
namespace {

struct MarkDrawing {
  const char *colour, *name, *beam, *posts;
};

MarkDrawing drawing_of(VerdictMark mark) {
  constexpr const char* kOpenBeam = "M6 20h22M36 20h4M46 20h4M56 20h4";
  constexpr const char* kOpenPosts = "M16 22v34M50 30v4M50 42v4M50 52v4";
  switch (mark) {
    case VerdictMark::kGood:
      return {"clear", "good", "M6 20h54", "M16 22v34M50 22v34"};
    case VerdictMark::kNotGood:
      return {"heed", "not good", "M6 32L60 10", "M16 34v22M50 24v32"};
    case VerdictMark::kUnresolved:
      return {"open", "unresolved", kOpenBeam, kOpenPosts};
    case VerdictMark::kNoAnswer:
      break;
  }
  return {"heed", "no answer", kOpenBeam, kOpenPosts};
}

}  // namespace

std::string html_page(const std::string& title, const std::optional<std::string>& reference,
                      const std::string& command, const std::string& body) {
  std::string html =
      "<!DOCTYPE html>\n<html lang=\"en\"><head><meta charset=\"utf-8\">\n"
      "<meta name=\"viewport\" content=\"width=device-width, initial-scale=1\">\n";
  html +=
      fmt::format("<title>{}</title>\n<style>{}</style></head>\n<body><main>\n", escaped(title), kHtmlStyle);
  html += fmt::format("<header class=\"top\"><h1>{}</h1><p>{}{} {}, {}</p></header>\n", path_to_html(title),
                      reference ? "Reference: " + escaped(*reference) + " · " : "", program_name(),
                      program_version(), escaped(command));
  return html + body +
         fmt::format(
             "<footer>Made by {} {}. This page stands alone: it loads nothing and runs "
             "nothing.</footer>\n</main></body></html>\n",
             program_name(), program_version());
}

std::string verdict_mark(VerdictMark mark) {
  const MarkDrawing drawing = drawing_of(mark);
  return fmt::format(
      "<svg class=\"{}\" viewBox=\"0 0 66 66\" role=\"img\" aria-label=\"{}\"><path d=\"{}\" "
      "stroke=\"currentColor\" "
      "stroke-width=\"6\" stroke-linecap=\"round\" fill=\"none\"/><path d=\"{}M4 60h58\" "
      "stroke=\"currentColor\" "
      "stroke-width=\"3\" stroke-linecap=\"round\" fill=\"none\"/></svg>",
      drawing.colour, drawing.name, drawing.beam, drawing.posts);
}

std::string question_in_words(const QuestionAsked& asked) {
  const std::string& c = asked.command;
  if (c == "check" && asked.steps)
    return "Which step of the load path is the first that is not positive definite?";
  if (c == "check")
    return asked.located ? "Is K positive definite? If not: where, and why?" : "Is K positive definite?";
  if (c == "locate") return "Which nodes carry the zero, negative and weak directions of K, and why?";
  if (c == "forecast") return "What will a factorization of K take?";
  const std::string subject = asked.geometric ? "critical factors of the pencil of K and G"
                              : asked.mass    ? "eigenvalues of K - s M"
                                              : "eigenvalues of K";
  if (c == "count") return "How many " + subject + " lie below the values asked?";
  if (c == "sweep") return "How does the number of " + subject + " grow over the range?";
  if (c == "bracket") return "Between which bounds do the " + subject + " lie?";
  if (c == "audit") return "Is the list of " + subject + " complete in its range?";
  return "What was asked: " + c;
}

namespace {

/// For a shell: as it is where no character has a meaning of its own, else between single quotes.
std::string quoted(const std::string& argument) {
  constexpr const char* kPlain = "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789@%+=:,./_-";
  if (!argument.empty() && argument.find_first_not_of(kPlain) == std::string::npos) return argument;
  std::string text = "'";
  for (const char c : argument) text += c == '\'' ? std::string("'\\''") : std::string(1, c);
  return text + "'";
}

}  // namespace

std::string command_to_html(const std::vector<std::string>& arguments) {
  std::string command = escaped(program_name());
  for (const std::string& argument : arguments) {
    const std::string word = escaped(quoted(argument));
    command += " " + (argument.rfind('-', 0) == 0 ? "<span class=\"num\">" + word + "</span>" : word);
  }
  return fmt::format("<code>{}</code>", command);
}

std::string begin_table(const std::string& name, const std::string& kind, const std::string& head) {
  return fmt::format(
      "<div class=\"scroll\" role=\"group\" aria-label=\"{0}\" tabindex=\"0\"><table{1} "
      "aria-label=\"{0}\">\n<thead><tr>{2}</tr></thead>\n<tbody>\n",
      escaped(name), kind.empty() ? "" : fmt::format(" class=\"{}\"", kind), head);
}

std::string end_table() {
  return "</tbody></table></div>\n";
}

}  // namespace stanchion
