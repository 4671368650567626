// Runs a test program with the kernels of one instruction set, named by STANCHION_TEST_KERNELS: what the
// widest set of this processor does right, another one may not.
#include <gtest/gtest.h>

#include <cstdlib>
#include <string>

#include "dense/kernels.hpp"

namespace stanchion::test {
namespace {

/// Whether this processor can run `isa`; from then on kernels_of<Scalar>() is that set.
template <class Scalar>
bool use(const std::string& isa) {
  const KernelSet<Scalar>* sets[3];
  const int count = kernel_sets(sets);
  for (int s = 0; s < count; ++s) {
    if (isa != sets[s]->isa) continue;
    use_kernels(*sets[s]);
    return true;
  }
  return false;
}

class KernelChoice : public ::testing::Environment {
  void SetUp() override {
    const char* named = std::getenv("STANCHION_TEST_KERNELS");
    if (named == nullptr || (use<double>(named) && use<float>(named))) return;
    ASSERT_STREQ(named, "AVX2") << "no such kernels";
    GTEST_SKIP() << "this processor has no AVX2";
  }
};

const ::testing::Environment* const kChoice = ::testing::AddGlobalTestEnvironment(new KernelChoice);

}  // namespace
}  // namespace stanchion::test
