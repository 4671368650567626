// Numbers in text: fast, locale-free, and strict about what they accept.
#pragma once

#include "stanchion/types.hpp"

namespace stanchion {

enum class NumberFault {
  kNone,
  kMissing,     ///< no text where a number was expected
  kUnreadable,  ///< text that is not a number
  kOverflow,    ///< a number beyond the largest one that can be held
  kUnderflow,   ///< one that is not zero but too small to be held
  kNotFinite,   ///< "nan" or "inf"
};

/// Whether a character ends a number: a blank, a separator, a line end, or the end of the text.
inline bool ends_number(char c) {
  return c == ' ' || c == '\t' || c == '\r' || c == '\n' || c == ',' || c == ';' || c == '"';
}

inline const char* skip_blanks(const char* p, const char* end) {
  while (p != end && (*p == ' ' || *p == '\t' || *p == '\r')) ++p;
  return p;
}

/// Reads a whole number at `p` and moves `p` past it. Values beyond +-10^15 are an overflow.
inline NumberFault scan_whole(const char*& p, const char* end, Offset& value) {
  const char* q = p;
  if (q == end) return NumberFault::kMissing;
  const bool negative = *q == '-';
  if (negative || *q == '+') ++q;
  Offset number = 0;
  const char* const first = q;
  while (q != end && static_cast<unsigned char>(*q - '0') < 10) {
    if (number > 100'000'000'000'000) return NumberFault::kOverflow;
    number = number * 10 + (*q - '0');
    ++q;
  }
  if (q == first || (q != end && !ends_number(*q))) return NumberFault::kUnreadable;
  p = q;
  value = negative ? -number : number;
  return NumberFault::kNone;
}

/// Reads a real number (decimal, exponent letter e, E, d or D) at `p`, rounded to nearest, and moves `p` past
/// it. What is held below 1e-308 has fewer digits; what rounds to zero without being zero is a fault.
NumberFault scan_real(const char*& p, const char* end, double& value);

/// Like scan_real, for a field that must be a whole number; `exact` says whether it is held without rounding.
NumberFault scan_integer_value(const char*& p, const char* end, double& value, bool& exact);

}  // namespace stanchion
