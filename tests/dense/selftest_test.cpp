#include "dense/selftest.hpp"

#include <gtest/gtest.h>

#include <ctime>

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
  // In processor time, which does not depend on what else the machine has to do.
  const std::clock_t start = std::clock();
  selftest(SelftestLevel::kFull);
  const std::clock_t between = std::clock();
  const auto quick = selftest(SelftestLevel::kQuick);
  const std::clock_t end = std::clock();
  EXPECT_EQ(quick.size(), 10U);
  EXPECT_LT(end - between, (between - start) / 2);
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
