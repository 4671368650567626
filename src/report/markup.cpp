#include "report/markup.hpp"

#include <algorithm>

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
