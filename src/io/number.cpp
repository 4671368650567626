#include "io/number.hpp"

#include <algorithm>
#include <charconv>
#include <cmath>
#include <string>
#include <string_view>
#include <system_error>

namespace stanchion {
namespace {

/// Decides a number that from_chars called out of range: its value is either beyond the largest double or
/// rounds to zero. True for the former: the decimal exponent of its first digit that is not zero is positive.
bool is_huge(std::string_view text) {
  Offset exponent = 0, point = 0;
  bool after_point = false, digit_seen = false;
  std::size_t i = 0;
  for (; i < text.size() && text[i] != 'e' && text[i] != 'E'; ++i) {
    const char c = text[i];
    if (c == '.') after_point = true;
    if (c < '0' || c > '9') continue;
    digit_seen = digit_seen || c != '0';
    if (!after_point && digit_seen) ++point;
    if (after_point && !digit_seen) --point;
  }
  if (i < text.size()) {
    ++i;
    const bool negative = i < text.size() && text[i] == '-';
    if (i < text.size() && (text[i] == '-' || text[i] == '+')) ++i;
    for (; i < text.size(); ++i)
      exponent = std::min<Offset>(exponent * 10 + (text[i] - '0'), 1'000'000'000'000);
    if (negative) exponent = -exponent;
  }
  return exponent + point > 0;
}

NumberFault judge(std::errc error, const char* first, const char* last, double& value) {
  if (error == std::errc::result_out_of_range) {
    return is_huge({first, static_cast<std::size_t>(last - first)}) ? NumberFault::kOverflow
                                                                    : NumberFault::kUnderflow;
  }
  return std::isfinite(value) ? NumberFault::kNone : NumberFault::kNotFinite;
}

/// Fortran writes 1.5D+03, and 1.5+103 when the exponent needs three digits.
NumberFault scan_fortran(const char*& p, const char* start, const char* end, double& value) {
  std::string plain;
  const char* q = start;
  for (; q != end && !ends_number(*q) && plain.size() < 400; ++q) {
    const bool sign = *q == '+' || *q == '-';
    if (sign && !plain.empty() && plain.back() >= '.' && plain.back() <= '9' && plain.back() != '/') {
      if (plain.find('e') != std::string::npos) return NumberFault::kUnreadable;
      plain += 'e';
    }
    if (*q == '+' && (plain.empty() || plain.back() == 'e')) continue;
    plain += *q == 'd' || *q == 'D' || *q == 'E' ? 'e' : *q;
  }
  const char* const last = plain.data() + plain.size();
  const auto [stop, error] = std::from_chars(plain.data(), last, value);
  if (error == std::errc::invalid_argument || stop != last) return NumberFault::kUnreadable;
  p = q;
  return judge(error, plain.data(), last, value);
}

}  // namespace

NumberFault scan_real(const char*& p, const char* end, double& value) {
  if (p == end) return NumberFault::kMissing;
  const char* start = p;
  if (*start == '+') {
    ++start;
    if (start == end || *start == '-' || *start == '+') return NumberFault::kUnreadable;
  }
  const auto [stop, error] = std::from_chars(start, end, value);
  if (error == std::errc::invalid_argument) return NumberFault::kUnreadable;
  if (stop != end && !ends_number(*stop)) return scan_fortran(p, start, end, value);
  p = stop;
  return judge(error, start, stop, value);
}

NumberFault scan_integer_value(const char*& p, const char* end, double& value, bool& exact) {
  exact = true;
  const char* q = p;
  if (q == end) return NumberFault::kMissing;
  if (*q == '-' || *q == '+') ++q;
  const char* const first = q;
  while (q != end && *q >= '0' && *q <= '9') ++q;
  const bool whole = q != first && (q == end || ends_number(*q));
  const char* const number = p;
  const NumberFault fault = scan_real(p, end, value);
  if (fault != NumberFault::kNone) return fault;
  if (!whole) {
    p = number;
    return NumberFault::kUnreadable;
  }
  if (q - first <= 15) return fault;
  std::int64_t held = 0;
  const auto [stop, error] = std::from_chars(*number == '+' ? number + 1 : number, q, held);
  constexpr double kEdge = 9.2e18;
  exact = error == std::errc() && std::fabs(value) < kEdge && static_cast<std::int64_t>(value) == held;
  return fault;
}

}  // namespace stanchion
