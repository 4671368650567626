#include "report/markup.hpp"

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

}  // namespace

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
