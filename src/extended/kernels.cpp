#include "extended/kernels.hpp"

#include <string_view>

#include "dense/kernels.hpp"

namespace stanchion {
namespace extended_isa_generic {
extern const ScalarKernels<double> double_table;
extern const ScalarKernels<DoubleDouble> double_double_table;
}  // namespace extended_isa_generic
namespace extended_isa_avx2 {
extern const ScalarKernels<double> double_table;
extern const ScalarKernels<DoubleDouble> double_double_table;
}  // namespace extended_isa_avx2
namespace extended_isa_avx512 {
extern const ScalarKernels<double> double_table;
extern const ScalarKernels<DoubleDouble> double_double_table;
}  // namespace extended_isa_avx512

namespace {

bool has_avx2() {
  return __builtin_cpu_supports("avx2") && __builtin_cpu_supports("fma");
}

bool has_avx512() {
  return has_avx2() && __builtin_cpu_supports("avx512f") && __builtin_cpu_supports("avx512dq") &&
         __builtin_cpu_supports("avx512vl") && __builtin_cpu_supports("avx512bw");
}

/// The set that goes with the dense kernels in use: plain ones where those are.
template <class Scalar>
const ScalarKernels<Scalar>& pick(const ScalarKernels<Scalar>& plain, const ScalarKernels<Scalar>& avx2,
                                  const ScalarKernels<Scalar>& avx512) {
  const std::string_view isa = kernels().isa;
  if (isa == "AVX-512" && has_avx512()) return avx512;
  return isa != reference_kernels().isa && has_avx2() ? avx2 : plain;
}

template <class Scalar>
int list(const ScalarKernels<Scalar>& plain, const ScalarKernels<Scalar>& avx2,
         const ScalarKernels<Scalar>& avx512, const ScalarKernels<Scalar>* sets[3]) {
  int count = 0;
  sets[count++] = &plain;
  if (has_avx2()) sets[count++] = &avx2;
  if (has_avx512()) sets[count++] = &avx512;
  return count;
}

}  // namespace

template <>
const ScalarKernels<double>& scalar_kernels() {
  static const ScalarKernels<double>& chosen = pick(
      extended_isa_generic::double_table, extended_isa_avx2::double_table, extended_isa_avx512::double_table);
  return chosen;
}

template <>
const ScalarKernels<DoubleDouble>& scalar_kernels() {
  static const ScalarKernels<DoubleDouble>& chosen =
      pick(extended_isa_generic::double_double_table, extended_isa_avx2::double_double_table,
           extended_isa_avx512::double_double_table);
  return chosen;
}

template <>
int scalar_kernel_sets(const ScalarKernels<double>* sets[3]) {
  return list(extended_isa_generic::double_table, extended_isa_avx2::double_table,
              extended_isa_avx512::double_table, sets);
}

template <>
int scalar_kernel_sets(const ScalarKernels<DoubleDouble>* sets[3]) {
  return list(extended_isa_generic::double_double_table, extended_isa_avx2::double_double_table,
              extended_isa_avx512::double_double_table, sets);
}

}  // namespace stanchion
