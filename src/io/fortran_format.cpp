#include "io/fortran_format.hpp"

#include <algorithm>
#include <string>

namespace stanchion {
namespace {

constexpr int kWidest = 1000;

/// Walks a format without its blanks, in capitals.
class FormatText {
 public:
  explicit FormatText(std::string_view text) {
    for (const char c : text) {
      if (c != ' ') text_ += c >= 'a' && c <= 'z' ? static_cast<char>(c - 'a' + 'A') : c;
    }
  }

  char peek() const { return at_ < text_.size() ? text_[at_] : '\0'; }
  bool take(char c) {
    if (peek() != c) return false;
    ++at_;
    return true;
  }
  /// A number of at most four digits; nothing when there is none.
  std::optional<int> number() {
    if (peek() < '0' || peek() > '9') return std::nullopt;
    int value = 0;
    while (peek() >= '0' && peek() <= '9' && value < kWidest) value = value * 10 + (text_[at_++] - '0');
    return value;
  }
  std::size_t position() const { return at_; }
  void go_back(std::size_t position) { at_ = position; }

 private:
  std::string text_;
  std::size_t at_ = 0;
};

/// kP with an optional comma; leaves the walk where it was when there is none.
void take_scale(FormatText& text, FortranFormat& format) {
  const std::size_t start = text.position();
  const bool negative = text.take('-');
  if (!negative) text.take('+');
  const auto scale = text.number();
  if (!scale || !text.take('P')) {
    text.go_back(start);
    return;
  }
  format.scale = negative ? -*scale : *scale;
  text.take(',');
}

bool take_descriptor(FormatText& text, FortranFormat& format) {
  const char kind = text.peek();
  if (kind != 'I' && kind != 'E' && kind != 'D' && kind != 'F' && kind != 'G') return false;
  text.take(kind);
  if (kind == 'E') text.take('S') || text.take('N');  // ES and EN read like E
  const auto width = text.number();
  if (!width) return false;
  format.width = *width;
  format.real = kind != 'I';
  if (text.take('.')) {
    const auto decimals = text.number();
    if (!decimals) return false;
    format.decimals = format.real ? *decimals : 0;
    if (format.real && text.take('E') && !text.number()) return false;
  }
  return true;
}

std::string_view field_of(std::string_view line, int field, const FortranFormat& format) {
  const auto stride = static_cast<std::size_t>(format.width + format.skip);
  const std::size_t begin = static_cast<std::size_t>(field) * stride + static_cast<std::size_t>(format.skip);
  if (begin >= line.size()) return {};
  return line.substr(begin, static_cast<std::size_t>(format.width));
}

bool is_digit(char c) {
  return c >= '0' && c <= '9';
}

/// The slow way, for fields without a point, with blanks inside, or under a scale factor: writes the number
/// out as ordinary text.
NumberFault read_unusual(std::string_view field, const FortranFormat& format, double& value) {
  std::string digits, exponent;
  bool negative = false, in_exponent = false;
  int decimals = -1;
  for (const char c : field) {
    if (c == ' ' || c == '\t') continue;
    if (in_exponent) {
      if (!is_digit(c) && !(exponent.empty() && (c == '-' || c == '+'))) return NumberFault::kUnreadable;
      exponent += c;
    } else if (is_digit(c)) {
      digits += c;
      if (decimals >= 0) ++decimals;
    } else if (c == '.' && decimals < 0) {
      decimals = 0;
    } else if ((c == '-' || c == '+') && digits.empty() && decimals < 0) {
      negative = c == '-';
    } else if ((c | 0x20) == 'e' || (c | 0x20) == 'd') {
      in_exponent = true;
    } else if (c == '-' || c == '+') {
      in_exponent = true;
      exponent += c;
    } else {
      return NumberFault::kUnreadable;
    }
  }
  if (digits.empty() || (in_exponent && (exponent.empty() || !is_digit(exponent.back()))) ||
      exponent.size() > 8) {
    return NumberFault::kUnreadable;
  }
  long power = -(decimals >= 0 ? decimals : format.decimals);
  power += in_exponent ? std::stol(exponent) : -format.scale;
  const std::string text = (negative ? "-" : "") + digits + "e" + std::to_string(power);
  const char* p = text.data();
  return scan_real(p, text.data() + text.size(), value);
}

}  // namespace

std::optional<FortranFormat> parse_fortran_format(std::string_view source) {
  FormatText text(source);
  FortranFormat format;
  if (!text.take('(')) return std::nullopt;
  take_scale(text, format);
  format.per_line = text.number().value_or(1);
  const bool group = text.take('(');
  if (group) {
    const std::size_t start = text.position();
    const auto skip = text.number();
    if (text.take('X')) {
      format.skip = skip.value_or(1);
      if (!text.take(',')) return std::nullopt;
    } else {
      text.go_back(start);
    }
    take_scale(text, format);
  }
  if (!take_descriptor(text, format)) return std::nullopt;
  if (group && !text.take(')')) return std::nullopt;
  if (!text.take(')') || text.peek() != '\0') return std::nullopt;
  if (format.per_line < 1 || format.width < 1 || format.per_line > kWidest || format.width > kWidest) {
    return std::nullopt;
  }
  return format;
}

NumberFault read_fortran_real(std::string_view line, int field, const FortranFormat& format, double& value) {
  const std::string_view text = field_of(line, field, format);
  const char* p = text.data();
  const char* const end = p + text.size();
  p = skip_blanks(p, end);
  if (p == end) return NumberFault::kMissing;
  if (format.scale == 0 && text.find('.') != std::string_view::npos) {
    const char* number = p;
    const NumberFault fault = scan_real(number, end, value);
    if (fault != NumberFault::kUnreadable && skip_blanks(number, end) == end) return fault;
  }
  // Spelled-out "NaN" and "Inf" are recognised by the ordinary scan only.
  if ((*p | 0x20) == 'n' || (*p | 0x20) == 'i' || (end - p > 1 && (p[1] | 0x20) == 'i')) {
    return scan_real(p, end, value);
  }
  return read_unusual(text, format, value);
}

NumberFault read_fortran_whole(std::string_view line, int field, const FortranFormat& format, Offset& value) {
  const std::string_view text = field_of(line, field, format);
  const char* p = text.data();
  const char* const end = p + text.size();
  p = skip_blanks(p, end);
  if (p == end) return NumberFault::kMissing;
  const NumberFault fault = scan_whole(p, end, value);
  return fault == NumberFault::kNone && skip_blanks(p, end) != end ? NumberFault::kUnreadable : fault;
}

}  // namespace stanchion
