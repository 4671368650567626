// Random numbers without a state: a value is a function of a key and a counter, so that any part of a vector
// can be drawn by any thread, in any order, with the same bits.
#pragma once

#include <array>
#include <cmath>
#include <cstdint>
#include <numbers>
#include <utility>

namespace stanchion {

/// Philox 2x64 with ten rounds (Salmon, Moraes, Dror, Shaw, "Parallel random numbers: as easy as 1, 2, 3",
/// SC11). Every counter of every stream of every key gives two independent uniform words. Immutable: thread
/// safe.
class CounterRandom {
 public:
  explicit CounterRandom(std::uint64_t key, std::uint64_t stream = 0) : key_(key), stream_(stream) {}

  std::array<std::uint64_t, 2> words(std::uint64_t counter) const {
    __extension__ using Wide = unsigned __int128;
    constexpr std::uint64_t kMultiplier = 0xD2B74407B1CE6E93, kWeyl = 0x9E3779B97F4A7C15;
    std::uint64_t first = counter, second = stream_, key = key_;
    for (int round = 0; round < 10; ++round) {
      const Wide product = Wide{first} * kMultiplier;
      first = static_cast<std::uint64_t>(product >> 64) ^ key ^ second;
      second = static_cast<std::uint64_t>(product);
      key += kWeyl;
    }
    return {first, second};
  }

  /// One uniform 64-bit word.
  std::uint64_t bits(std::uint64_t counter) const { return words(counter)[0]; }

  /// Uniform on the multiples of 2^-53 in [0, 1).
  double uniform(std::uint64_t counter) const { return static_cast<double>(bits(counter) >> 11) * 0x1p-53; }

  /// Two independent standard normal numbers from 53-bit uniforms (Box and Muller, Ann. Math. Stat. 29
  /// (1958)).
  std::pair<double, double> gaussians(std::uint64_t counter) const {
    const auto [first, second] = words(counter);
    const double never_zero = static_cast<double>((first >> 11) + 1) * 0x1p-53;
    const double angle = 2 * std::numbers::pi * (static_cast<double>(second >> 11) * 0x1p-53);
    const double radius = std::sqrt(-2 * std::log(never_zero));
    return {radius * std::cos(angle), radius * std::sin(angle)};
  }

  /// A key from two numbers, for seeds made of several things; the order matters.
  static std::uint64_t combine(std::uint64_t a, std::uint64_t b) {
    return CounterRandom(a, kCombine).bits(b);
  }

 private:
  static constexpr std::uint64_t kCombine = 0x636f6d62696e6521;  ///< a stream that nothing is drawn from

  std::uint64_t key_, stream_;
};

}  // namespace stanchion
