// The single properties behind dense/selftest.hpp. Each returns what is wrong in words, or nothing.
#pragma once

#include <cstdint>
#include <string>
#include <vector>

#include "base/counter_random.hpp"
#include "dense/kernels.hpp"
#include "dense/selftest.hpp"

namespace stanchion::selftests {

/// Whole numbers from -`size` to `size`, and uniform numbers in [-1, 1), one after the other from one key.
class Numbers {
 public:
  explicit Numbers(std::uint64_t key) : random_(key) {}
  double whole(int size) {
    const auto choices = static_cast<std::uint64_t>(2 * size + 1);
    return static_cast<double>(static_cast<int>(random_.bits(next_++) % choices) - size);
  }
  double uniform() { return 2 * random_.uniform(next_++) - 1; }
  template <class Scalar = double>
  std::vector<Scalar> wholes(Offset count, int size) {
    std::vector<Scalar> values(static_cast<std::size_t>(count));
    for (Scalar& v : values) v = static_cast<Scalar>(whole(size));
    return values;
  }

 private:
  CounterRandom random_;
  std::uint64_t next_ = 0;
};

std::string rounding_to_nearest();
std::string gradual_underflow();
std::string fused_operations();
std::string division_and_roots();
std::string exact_products(SelftestLevel level);
std::string rounded_products(SelftestLevel level);
template <class Scalar>
std::string exact_kernels(const KernelSet<Scalar>& set);
template <class Scalar>
std::string factored_tiles(const KernelSet<Scalar>& set);

}  // namespace stanchion::selftests
