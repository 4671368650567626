#include "model/byte_size.hpp"

#include <fmt/format.h>

#include <cctype>
#include <charconv>
#include <cmath>
#include <optional>
#include <string>

namespace stanchion {
namespace {

/// 1024 to the power that the unit names; nothing when it is no unit.
std::optional<double> unit_factor(std::string unit) {
  for (char& letter : unit) letter = static_cast<char>(std::tolower(static_cast<unsigned char>(letter)));
  if (unit.empty() || unit == "b") return 1;
  const auto power = std::string_view("kmgt").find(unit[0]);
  const std::string rest = unit.substr(1);
  if (power == std::string_view::npos || !(rest.empty() || rest == "b" || rest == "ib")) return std::nullopt;
  return std::exp2(10 * (static_cast<double>(power) + 1));
}

std::string whole_units(Offset bytes, bool up) {
  const int shift = bytes >= 1 << 20 ? 20 : bytes >= 1 << 10 ? 10 : 0;
  const Offset units = (bytes >> shift) + (up && (bytes & ((Offset{1} << shift) - 1)) != 0 ? 1 : 0);
  return fmt::format("{} {}", units, shift == 20 ? "MiB" : shift == 10 ? "KiB" : "B");
}

}  // namespace

Result<Offset> parse_byte_size(std::string_view text) {
  const Status failure =
      Status::bad_usage("bad-size", fmt::format("'{}' is not an amount of memory", text), {},
                        "write a positive number and a unit, such as 8G, 512M or 1.5GiB (powers of 1024)");
  double amount = 0;
  const auto parsed = std::from_chars(text.data(), text.data() + text.size(), amount);
  if (parsed.ec != std::errc{}) return failure;
  const auto unit = unit_factor(std::string(parsed.ptr, text.data() + text.size()));
  if (!unit || !(amount > 0)) return failure;
  const double bytes = std::floor(amount * *unit);
  if (!(bytes >= 1 && bytes < 0x1p62)) return failure;
  return static_cast<Offset>(bytes);
}

std::string size_needed(Offset bytes) {
  return whole_units(bytes, true);
}

std::string size_allowed(Offset bytes) {
  return whole_units(bytes, false);
}

}  // namespace stanchion
