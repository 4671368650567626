#include "model/numbers.hpp"

#include <fmt/format.h>

#include <cmath>
#include <cstdlib>

namespace stanchion {
namespace {

/// `number` with the largest of the prefixes (each a factor 1000) that leaves at least 1 before the point.
std::string with_prefix(double number, const char* unit) {
  static constexpr const char* kPrefixes[] = {"", "k", "M", "G", "T", "P"};
  int prefix = 0;
  while (number >= 999.5 && prefix < 5) {
    number /= 1000;
    ++prefix;
  }
  const int decimals = prefix > 0 && number < 9.95 ? 1 : 0;
  return fmt::format("{:.{}f} {}{}", number, decimals, kPrefixes[prefix], unit);
}

std::string rounded_towards(double number, int digits, double direction) {
  if (digits > 15) return exact(number);
  std::string text = fmt::format("{:.{}g}", number, digits);
  if (number == 0 || !std::isfinite(number)) return text;
  // Of the last digit one more where the nearest number of so many digits lies on the other side.
  const double unit = std::pow(10.0, std::floor(std::log10(std::fabs(number))) - digits + 1);
  for (int more = 1; direction * (std::strtod(text.c_str(), nullptr) - number) < 0 && more < 4; ++more)
    text = fmt::format("{:.{}g}", number + direction * more * unit / 2, digits);
  return direction * (std::strtod(text.c_str(), nullptr) - number) < 0 ? exact(number) : text;
}

}  // namespace

std::string grouped(Offset number) {
  std::string digits = fmt::format("{}", number);
  const std::size_t first = digits[0] == '-' ? 1 : 0;
  for (std::size_t at = digits.size(); at > first + 3;) {
    at -= 3;
    digits.insert(at, 1, ',');
  }
  return digits;
}

std::string rounded(double number) {
  return fmt::format("{:.3g}", number);
}

std::string exact(double number) {
  return fmt::format("{}", number);
}

std::string rounded_down(double number, int digits) {
  return rounded_towards(number, digits, -1);
}

std::string rounded_up(double number, int digits) {
  return rounded_towards(number, digits, 1);
}

std::string bytes_in_words(Offset bytes) {
  return with_prefix(static_cast<double>(bytes), "B");
}

std::string flops_in_words(double flops) {
  return with_prefix(flops, "flop");
}

std::string duration_in_words(double seconds) {
  if (!(seconds >= 0) || !std::isfinite(seconds)) return "unknown";
  if (seconds < 0.001) return "<1 ms";
  if (seconds < 0.995) return fmt::format("{:.2g} s", seconds);
  if (seconds < 59.95) return fmt::format("{:.1f} s", seconds);
  const auto whole = static_cast<Offset>(std::llround(seconds));
  if (whole < 3600) return fmt::format("{} min {} s", whole / 60, whole % 60);
  return fmt::format("{} h {} min", whole / 3600, whole % 3600 / 60);
}

std::string duration_in_sentence(double seconds, const char* qualifier) {
  return seconds < 0.001 ? "less than 1 ms" : qualifier + duration_in_words(seconds);
}

std::string counted(Offset number, const std::string& noun) {
  if (number == 0) return "no " + noun;
  return grouped(number) + " " + noun + (number == 1 ? "" : "s");
}

}  // namespace stanchion
