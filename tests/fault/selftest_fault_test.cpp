// The self-test on a machine that computes wrongly: modes of the processor changed, and a product spoiled.
#include <gtest/gtest.h>

#include <cfenv>
#if defined(__x86_64__)
#include <pmmintrin.h>
#include <xmmintrin.h>
#endif

#include "dense/selftest.hpp"
#include "fault/wrong_product.hpp"

namespace stanchion {
namespace {

using test::Wrong;

/// What the self-test says while `set` is in force; the modes are put back before anything is compared.
template <class Set>
Status status_under(const Set& set) {
  std::fenv_t before;
  std::fegetenv(&before);
  set();
  Status status = arithmetic_selftest(SelftestLevel::kQuick);
  std::fesetenv(&before);
  return status;
}

void expect_refused(const Status& status, const char* because) {
  EXPECT_EQ(status.kind(), StatusKind::kInternal);
  EXPECT_EQ(status.code(), "wrong-arithmetic");
  EXPECT_NE(status.message().find(because), std::string::npos) << status.to_string();
  EXPECT_FALSE(status.remedy().empty());
}

TEST(SelftestFault, PassesWhenNothingIsWrong) {
  test::mend_product();
  const Status status = arithmetic_selftest(SelftestLevel::kFull);
  EXPECT_TRUE(status.ok()) << status.to_string();
}

TEST(SelftestFault, RefusesEveryOtherRoundingMode) {
  for (const int mode : {FE_UPWARD, FE_DOWNWARD, FE_TOWARDZERO}) {
    expect_refused(status_under([&] { std::fesetround(mode); }), "rounding");
  }
}

#if defined(__x86_64__)
/// The rounding mode of the SSE unit alone: what fegetround() reads stays as it was.
TEST(SelftestFault, RefusesARoundingModeThatOnlyTheVectorUnitHas) {
  for (const unsigned mode : {_MM_ROUND_UP, _MM_ROUND_DOWN, _MM_ROUND_TOWARD_ZERO}) {
    expect_refused(status_under([&] { _MM_SET_ROUNDING_MODE(mode); }), "rounding");
  }
}

TEST(SelftestFault, RefusesFlushingToZero) {
  expect_refused(status_under([] { _MM_SET_FLUSH_ZERO_MODE(_MM_FLUSH_ZERO_ON); }), "underflow");
}

TEST(SelftestFault, RefusesDenormalsTakenForZero) {
  expect_refused(status_under([] { _MM_SET_DENORMALS_ZERO_MODE(_MM_DENORMALS_ZERO_ON); }), "underflow");
}
#endif

TEST(SelftestFault, RefusesAWrongProductAndNamesItsShape) {
  for (const Wrong wrong : {Wrong::kNudged, Wrong::kFlippedBit}) {
    test::spoil_product(wrong, 0, 3, true);
    const Status status = arithmetic_selftest(SelftestLevel::kQuick);
    test::mend_product();
    expect_refused(status, "dgemm");
    EXPECT_NE(status.remedy().find("BLAS"), std::string::npos);
  }
}

TEST(SelftestFault, FindsOneWrongEntryInAnyOneOfItsProducts) {
  test::mend_product();
  ASSERT_TRUE(arithmetic_selftest(SelftestLevel::kQuick).ok());
  const std::int64_t calls = test::mend_product();
  ASSERT_GT(calls, 80);
  for (std::int64_t call = 0; call < calls; call += 7) {
    test::spoil_product(Wrong::kShifted, call, static_cast<std::uint64_t>(call));
    const Status status = arithmetic_selftest(SelftestLevel::kQuick);
    test::mend_product();
    expect_refused(status, "dgemm");
  }
}

}  // namespace
}  // namespace stanchion
