#include <fmt/format.h>

#include <charconv>
#include <cmath>

#include "cli/arguments.hpp"

namespace stanchion::cli {
namespace {

/// All of `text` as a number; one leading plus sign is allowed, which from_chars does not know.
template <class Number>
std::optional<Number> whole_text(const std::string& text) {
  const char* begin = text.data();
  const char* const end = begin + text.size();
  if (end - begin > 1 && *begin == '+' && begin[1] != '-') ++begin;
  Number number{};
  const auto parsed = std::from_chars(begin, end, number);
  if (parsed.ec != std::errc{} || parsed.ptr != end) return std::nullopt;
  return number;
}

}  // namespace

Result<double> parse_real(const std::string& option, const std::string& text) {
  const auto number = whole_text<double>(text);
  if (number && std::isfinite(*number)) return *number;
  return Status::bad_usage("bad-number", fmt::format("'{}' is not a finite number", text), option,
                           "write a decimal number with a point, such as 1.5 or 1e-6");
}

Result<std::int64_t> parse_whole(const std::string& option, const std::string& text) {
  if (const auto number = whole_text<std::int64_t>(text)) return *number;
  return Status::bad_usage("bad-number", fmt::format("'{}' is not a whole number", text), option,
                           "write a whole number, such as 4");
}

}  // namespace stanchion::cli
