#include "dense/selftest.hpp"

#include <gtest/gtest.h>

#include "dense/kernels.hpp"

namespace stanchion {
namespace {

TEST(Selftest, ASoundMachinePassesEveryLine) {
  const auto lines = selftest(SelftestLevel::kFull);
  for (const SelftestLine& line : lines) EXPECT_TRUE(line.ok()) << line.what << ": " << line.wrong;
  const Kernels* sets[3];
  EXPECT_EQ(lines.size(), 6U + 4U * static_cast<std::size_t>(kernel_sets(sets)));
  EXPECT_TRUE(selftest_status(lines).ok());
}

TEST(Selftest, TheQuickLevelTriesTheSamePropertiesInLessTime) {
  const auto full = selftest(SelftestLevel::kFull), quick = selftest(SelftestLevel::kQuick);
  EXPECT_EQ(quick.size(), 10U);
  double full_seconds = 0, quick_seconds = 0;
  for (const SelftestLine& line : full) full_seconds += line.seconds;
  for (const SelftestLine& line : quick) quick_seconds += line.seconds;
  EXPECT_LT(quick_seconds, full_seconds / 2);
  EXPECT_TRUE(arithmetic_selftest(SelftestLevel::kQuick).ok());
}

TEST(Selftest, TheStatusOfAWrongLineNamesItAndItsRemedy) {
  const Status status =
      selftest_status({{"fine", "", "", 0}, {"products", "gave 3 for 4", "another one", 0}});
  EXPECT_EQ(status.kind(), StatusKind::kInternal);
  EXPECT_EQ(status.code(), "wrong-arithmetic");
  EXPECT_NE(status.message().find("products: gave 3 for 4"), std::string::npos);
  EXPECT_EQ(status.remedy(), "another one");
  EXPECT_FALSE(status.place().empty());
}

}  // namespace
}  // namespace stanchion
