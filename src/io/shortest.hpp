// Numbers to text: the shortest digits that read back as the same double.
#pragma once

#include <charconv>
#include <string>

namespace stanchion {

inline void append_number(std::string& text, double value) {
  char digits[32];
  const auto result = std::to_chars(digits, digits + sizeof digits, value);
  text.append(digits, result.ptr);
}

template <class Integer>
void append_integer(std::string& text, Integer value) {
  char digits[24];
  const auto result = std::to_chars(digits, digits + sizeof digits, value);
  text.append(digits, result.ptr);
}

inline std::string number_text(double value) {
  std::string text;
  append_number(text, value);
  return text;
}

}  // namespace stanchion
