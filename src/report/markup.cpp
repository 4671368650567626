#include "report/markup.hpp"

#include <algorithm>
#include <iterator>

namespace stanchion {
namespace {

constexpr const char* kReplacement = "\xEF\xBF\xBD";

/// Bytes of the UTF-8 character that starts at `at`, or 0 if there is none.
std::size_t character_length(std::string_view text, std::size_t at) {
  const auto byte = [&](std::size_t k) { return static_cast<unsigned char>(text[k]); };
  const unsigned char lead = byte(at);
  const std::size_t length = lead < 0x80                   ? 1
                             : lead >= 0xC2 && lead < 0xE0 ? 2
                             : lead >= 0xE0 && lead < 0xF0 ? 3
                             : lead >= 0xF0 && lead < 0xF5 ? 4
                                                           : 0;
  if (length == 0 || at + length > text.size()) return 0;
  for (std::size_t k = 1; k < length; ++k) {
    if ((byte(at + k) & 0xC0) != 0x80) return 0;
  }
  if (length == 3 && lead == 0xE0 && byte(at + 1) < 0xA0) return 0;  // longer than needed
  if (length == 3 && lead == 0xED && byte(at + 1) > 0x9F) return 0;  // half of a pair
  if (length == 4 && lead == 0xF0 && byte(at + 1) < 0x90) return 0;
  if (length == 4 && lead == 0xF4 && byte(at + 1) > 0x8F) return 0;
  return length;
}

/// The end of a number with a negative exponent, "1.33e-09", that starts at `at`; `at` where there is none.
std::size_t end_of_number(std::string_view text, std::size_t at) {
  const auto past = [&](const char* some, std::size_t from) {
    return std::min(text.find_first_not_of(some, from), text.size());
  };
  const std::size_t exponent = past("0123456789.", at);
  if (exponent == at || text.substr(exponent, 2) != "e-") return at;
  const std::size_t end = past("0123456789", exponent + 2);
  return end > exponent + 2 ? end : at;
}

bool is_digit(char c) {
  return c >= '0' && c <= '9';
}

/// "6" and "zero", "node" and "12", but not "0" and "and".
bool stay_together(std::string_view word, std::string_view next) {
  constexpr std::string_view kNumbered[] = {"node", "row", "column", "step"},
                             kLinks[] = {"and", "of", "at", "to", "is", "in"};
  if (word.empty() || next.empty()) return false;
  const auto letters = word.find_first_not_of('(');
  if (letters != word.npos && is_digit(next[0]) &&
      std::find(std::begin(kNumbered), std::end(kNumbered), word.substr(letters)) != std::end(kNumbered))
    return true;
  return is_digit(word[0]) && is_digit(word.back()) && next[0] >= 'a' && next[0] <= 'z' &&
         std::find(std::begin(kLinks), std::end(kLinks), next) == std::end(kLinks);
}

}  // namespace

std::string flowing(std::string_view text) {
  std::string result;
  std::size_t from = 0;
  for (std::size_t at = 0; at < text.size();) {
    const std::size_t end = end_of_number(text, at);
    if (end == at) {
      ++at;
      continue;
    }
    result += escaped(text.substr(from, at - from)) + "<span class=\"num\">" +
              escaped(text.substr(at, end - at)) + "</span>";
    from = at = end;
  }
  return result + escaped(text.substr(from));
}

std::string headline(std::string_view text) {
  constexpr const char* kNoBreak = "\xC2\xA0";
  const auto word_at = [&](std::size_t from) { return text.substr(from, text.find(' ', from) - from); };
  const auto set = [](std::string_view word) {
    return word.find('/') == word.npos ? flowing(word) : path_to_html(word);
  };
  std::string_view before = word_at(0);
  std::string bound = set(before);
  for (std::size_t at = before.size(); at < text.size();) {
    const std::string_view word = word_at(at + 1);
    bound += stay_together(before, word) ? kNoBreak : " ";
    bound += set(word);
    before = word;
    at += 1 + word.size();
  }
  return bound;
}

std::string path_to_html(std::string_view path) {
  std::string html;
  for (std::size_t from = 0; from < path.size();) {
    const std::size_t slash = path.find('/', from);
    const std::size_t to = slash == path.npos ? path.size() : slash + 1;
    html += escaped(path.substr(from, to - from)) + (to < path.size() ? "<wbr>" : "");
    from = to;
  }
  return html;
}

std::string escaped(std::string_view text) {
  std::string result;
  result.reserve(text.size() + 16);
  for (std::size_t at = 0; at < text.size();) {
    const std::size_t length = character_length(text, at);
    const char c = text[at];
    if (length == 0 || (length == 1 && static_cast<unsigned char>(c) < 0x20 && c != '\n' && c != '\t') ||
        c == 0x7F) {
      result += kReplacement;
      ++at;
      continue;
    }
    switch (c) {
      case '&':
        result += "&amp;";
        break;
      case '<':
        result += "&lt;";
        break;
      case '>':
        result += "&gt;";
        break;
      case '"':
        result += "&quot;";
        break;
      case '\'':
        result += "&#39;";
        break;
      default:
        result.append(text.substr(at, length));
    }
    at += length;
  }
  return result;
}

}  // namespace stanchion
