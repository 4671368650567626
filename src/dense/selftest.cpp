#include "dense/selftest.hpp"

#include "base/clock.hpp"
#include "dense/blas.hpp"
#include "dense/selftest_parts.hpp"

namespace stanchion {
namespace {

constexpr const char* kProcessorRemedy =
    "a library or a caller changed the processor's rounding or flushing mode, or the processor is faulty: "
    "leave the "
    "modes at their defaults (no -ffast-math in anything linked), or use another machine";
constexpr const char* kBlasRemedy =
    "use another BLAS (update-alternatives --config libblas.so.3), or for OpenBLAS another kernel "
    "(OPENBLAS_CORETYPE=Haswell); if another library computes wrongly too, suspect the machine";
constexpr const char* kKernelRemedy =
    "use another machine, and report this line: the program's own loops went wrong";

class Tester {
 public:
  template <class Test>
  void run(std::string what, const char* remedy, const Test& test) {
    const Stopwatch watch;
    std::string wrong = test();
    lines_.push_back({std::move(what), std::move(wrong), {}, watch.seconds()});
    if (!lines_.back().ok()) lines_.back().remedy = remedy;
  }
  std::vector<SelftestLine> take() { return std::move(lines_); }

 private:
  std::vector<SelftestLine> lines_;
};

template <class Scalar>
void try_kernels(Tester& tester, SelftestLevel level, const std::string& precision) {
  const KernelSet<Scalar>* sets[3];
  const int count = kernel_sets(sets);
  for (int s = 0; s < count; ++s) {
    const KernelSet<Scalar>& set = *sets[s];
    if (level == SelftestLevel::kQuick && &set != &kernels_of<Scalar>()) continue;
    tester.run("own loops for " + std::string(set.isa) + precision + ", exact", kKernelRemedy,
               [&] { return selftests::exact_kernels(set); });
    tester.run("own tile factors for " + std::string(set.isa) + precision + ", within the bound",
               kKernelRemedy, [&] { return selftests::factored_tiles(set); });
  }
}

}  // namespace

std::vector<SelftestLine> selftest(SelftestLevel level) {
  use_single_threaded_blas();
  const std::string blas = blas_description();
  Tester tester;
  tester.run("rounding to nearest, ties to even", kProcessorRemedy, selftests::rounding_to_nearest);
  tester.run("gradual underflow", kProcessorRemedy, selftests::gradual_underflow);
  tester.run("fused multiply-add", kProcessorRemedy, selftests::fused_operations);
  tester.run("division and square root", kProcessorRemedy, selftests::division_and_roots);
  tester.run("dense products of whole numbers, exact, by " + blas, kBlasRemedy,
             [&] { return selftests::exact_products(level); });
  tester.run("dense products of random numbers, within the bound, by " + blas, kBlasRemedy,
             [&] { return selftests::rounded_products(level); });
  try_kernels<double>(tester, level, "");
  try_kernels<float>(tester, level, " in single precision");
  return tester.take();
}

Status selftest_status(const std::vector<SelftestLine>& lines) {
  for (const SelftestLine& line : lines) {
    if (line.ok()) continue;
    return {StatusKind::kInternal, "wrong-arithmetic",
            "this machine does not compute as the error bounds assume: " + line.what + ": " + line.wrong +
                "; no answer is given",
            blas_description(), line.remedy};
  }
  return {};
}

Status arithmetic_selftest(SelftestLevel level) {
  return selftest_status(selftest(level));
}

}  // namespace stanchion
