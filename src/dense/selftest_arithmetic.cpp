// The four properties of the processor that the proofs use. Operands are volatile: nothing is folded by the
// compiler.
#include <cfenv>
#include <cmath>

#include "dense/selftest_parts.hpp"

namespace stanchion::selftests {
namespace {

struct Probe {
  const char* what;
  double found, right;
};

std::string first_wrong(std::initializer_list<Probe> probes) {
  for (const Probe& probe : probes) {
    // Not a difference: a flushing mode would hide it. Signs of zero do not matter.
    if (!(probe.found == probe.right)) {
      return std::string(probe.what) + " gave " + std::to_string(probe.found) + " (rounded for display)";
    }
  }
  return {};
}

double unit_in_last_place(double x) {
  return std::ldexp(1.0, std::ilogb(x) - 52);
}

}  // namespace

std::string rounding_to_nearest() {
  if (std::fegetround() != FE_TONEAREST) return "the rounding mode is not to nearest";
  volatile double one = 1, minus_one = -1, next = 1 + 0x1p-52, half = 0x1p-53, less = 0x1p-54;
  volatile double beyond_half = 0x1.0000000000001p-53, slightly = 1 + 0x1p-27, big = 0x1p53;
  return first_wrong({{"1 + 2^-53 (a tie)", one + half, 1},
                      {"-1 - 2^-53 (a tie)", minus_one - half, -1},
                      {"1 + 2^-52 + 2^-53 (a tie)", next + half, 1 + 0x1p-51},
                      {"1 + (2^-53 + 2^-105), rounded once", one + beyond_half, 1 + 0x1p-52},
                      {"-1 - (2^-53 + 2^-105), rounded once", minus_one - beyond_half, -1 - 0x1p-52},
                      {"1 - 2^-54 (a tie)", one - less, 1},
                      {"2^53 + 1 (a tie)", big + one, 0x1p53},
                      {"(1 + 2^-27)^2", slightly * slightly, 1 + 0x1p-26},
                      {"-(1 + 2^-27)^2", -slightly * slightly, -1 - 0x1p-26},
                      {"(1 + 2^-52)^2", next * next, 1 + 0x1p-51}});
}

std::string gradual_underflow() {
  volatile double least_normal = 0x1p-1022, least = 0x1p-1074, two = 2, large = 0x1p1000, three_halves = 1.5;
  const double halved = least_normal / two, doubled = least + least, scaled = least * large;
  // Powers of two back to the ordinary range, where they can be compared and shown.
  volatile double shown_halved = halved, shown_doubled = doubled;
  return first_wrong({{"2^-1022 / 2 times 2^1000", shown_halved * large, 0x1p-23},
                      {"(2^-1074 + 2^-1074) times 2^1000", shown_doubled * large, 0x1p-73},
                      {"2^-1074 times 2^1000", scaled, 0x1p-74},
                      {"(1.5 2^-1022 - 2^-1022) times 2^1000",
                       (three_halves * least_normal - least_normal) * large, 0x1p-23}});
}

std::string fused_operations() {
  volatile double above = 1 + 0x1p-27, below = 1 - 0x1p-27, minus_one = -1, tiny = 0x1p-600, huge = 0x1p600;
  return first_wrong({{"(1 + 2^-27)(1 - 2^-27) - 1, fused", std::fma(above, below, minus_one), -0x1p-54},
                      {"(1 + 2^-27)^2 - 1, fused", std::fma(above, above, minus_one), 0x1p-26 + 0x1p-54},
                      {"2^600 2^-600 - 1, fused", std::fma(huge, tiny, minus_one), 0},
                      {"2^-600 2^-600 + 2^-600, fused", std::fma(tiny, tiny, tiny), 0x1p-600}});
}

std::string division_and_roots() {
  Numbers numbers(3);
  for (int round = 0; round < 2000; ++round) {
    volatile double a = 1.5 + numbers.uniform() / 2, b = 1.5 + numbers.uniform() / 2;
    // Half a unit of the result: the remainders are exact (fused), so correct rounding can be told from any
    // other.
    const double quotient = a / b, remainder = std::fma(-quotient, b, a);
    if (!(std::fabs(remainder) <= b * unit_in_last_place(quotient) / 2))
      return "a quotient is not rounded correctly";
    const double root = std::sqrt(a), rest = std::fma(-root, root, a), unit = unit_in_last_place(root);
    if (!(std::fabs(rest) <= root * unit + unit * unit / 4)) return "a square root is not rounded correctly";
    const double product = a * b, lost = std::fma(a, b, -product);
    if (!(std::fabs(lost) <= unit_in_last_place(product) / 2)) return "a product is not rounded correctly";
  }
  return {};
}

}  // namespace stanchion::selftests
