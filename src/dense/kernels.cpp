#include "dense/kernels.hpp"

#include <atomic>

namespace stanchion {
namespace isa_generic {
extern const KernelSet<double> table;
extern const KernelSet<float> single_table;
}  // namespace isa_generic
namespace isa_avx2 {
extern const KernelSet<double> table;
extern const KernelSet<float> single_table;
}  // namespace isa_avx2
namespace isa_avx512 {
extern const KernelSet<double> table;
extern const KernelSet<float> single_table;
}  // namespace isa_avx512

namespace {

bool has_avx2() {
  return __builtin_cpu_supports("avx2") && __builtin_cpu_supports("fma");
}

bool has_avx512() {
  return has_avx2() && __builtin_cpu_supports("avx512f") && __builtin_cpu_supports("avx512dq") &&
         __builtin_cpu_supports("avx512vl") && __builtin_cpu_supports("avx512bw");
}

template <class Scalar>
struct Sets {
  const KernelSet<Scalar>&generic, &avx2, &avx512;
};
constexpr Sets<double> kDoubleSets{isa_generic::table, isa_avx2::table, isa_avx512::table};
constexpr Sets<float> kSingleSets{isa_generic::single_table, isa_avx2::single_table,
                                  isa_avx512::single_table};

template <class Scalar>
const KernelSet<Scalar>& choose(const Sets<Scalar>& sets) {
  if (has_avx512()) return sets.avx512;
  return has_avx2() ? sets.avx2 : sets.generic;
}

/// The one choice of the process for each scalar.
std::atomic<const KernelSet<double>*>& chosen(const Sets<double>& sets) {
  static std::atomic<const KernelSet<double>*> set{&choose(sets)};
  return set;
}
std::atomic<const KernelSet<float>*>& chosen(const Sets<float>& sets) {
  static std::atomic<const KernelSet<float>*> set{&choose(sets)};
  return set;
}

template <class Scalar>
int list(const Sets<Scalar>& all, const KernelSet<Scalar>* sets[3]) {
  int count = 0;
  sets[count++] = &all.generic;
  if (has_avx2()) sets[count++] = &all.avx2;
  if (has_avx512()) sets[count++] = &all.avx512;
  return count;
}

}  // namespace

template <>
const KernelSet<double>& kernels_of<double>() {
  return *chosen(kDoubleSets).load(std::memory_order_relaxed);
}
template <>
const KernelSet<float>& kernels_of<float>() {
  return *chosen(kSingleSets).load(std::memory_order_relaxed);
}

void use_kernels(const KernelSet<double>& set) {
  chosen(kDoubleSets).store(&set, std::memory_order_relaxed);
}
void use_kernels(const KernelSet<float>& set) {
  chosen(kSingleSets).store(&set, std::memory_order_relaxed);
}

template <>
const KernelSet<double>& reference_kernels_of<double>() {
  return isa_generic::table;
}
template <>
const KernelSet<float>& reference_kernels_of<float>() {
  return isa_generic::single_table;
}

int kernel_sets(const KernelSet<double>* sets[3]) {
  return list(kDoubleSets, sets);
}
int kernel_sets(const KernelSet<float>* sets[3]) {
  return list(kSingleSets, sets);
}

}  // namespace stanchion
