#include "dense/kernels.hpp"

#include <atomic>

namespace stanchion {
namespace isa_generic {
extern const Kernels table;
}
namespace isa_avx2 {
extern const Kernels table;
}
namespace isa_avx512 {
extern const Kernels table;
}

namespace {

bool has_avx2() {
  return __builtin_cpu_supports("avx2") && __builtin_cpu_supports("fma");
}

bool has_avx512() {
  return has_avx2() && __builtin_cpu_supports("avx512f") && __builtin_cpu_supports("avx512dq") &&
         __builtin_cpu_supports("avx512vl") && __builtin_cpu_supports("avx512bw");
}

const Kernels& choose() {
  if (has_avx512()) return isa_avx512::table;
  return has_avx2() ? isa_avx2::table : isa_generic::table;
}

/// The one choice of the process.
std::atomic<const Kernels*>& chosen() {
  static std::atomic<const Kernels*> set{&choose()};
  return set;
}

}  // namespace

const Kernels& kernels() {
  return *chosen().load(std::memory_order_relaxed);
}

void use_kernels(const Kernels& set) {
  chosen().store(&set, std::memory_order_relaxed);
}

const Kernels& reference_kernels() {
  return isa_generic::table;
}

int kernel_sets(const Kernels* sets[3]) {
  int count = 0;
  sets[count++] = &isa_generic::table;
  if (has_avx2()) sets[count++] = &isa_avx2::table;
  if (has_avx512()) sets[count++] = &isa_avx512::table;
  return count;
}

}  // namespace stanchion
