// What jobs may use.
#include "service/job_needs.hpp"

#include <gtest/gtest.h>

namespace stanchion::service {
namespace {

constexpr Offset kMebi = Offset{1} << 20;
const MachineShare kShare{4096 * kMebi, 4, 10'000};

JobRequest asking(std::vector<JobOption> options) {
  return {"id", "check", {}, std::move(options)};
}

TEST(Needs, SmallPlainFilesNeedNoForecast) {
  const auto needs = needs_of_small(asking({}), 10'000, true, kShare);
  ASSERT_TRUE(needs);
  EXPECT_EQ(needs->threads, 1);
  EXPECT_LE(needs->memory_bytes, 512 * kMebi);
  EXPECT_FALSE(needs_of_small(asking({}), 10'000, false, kShare)) << "compressed ones do";
  EXPECT_FALSE(needs_of_small(asking({}), 100 * kMebi, true, kShare)) << "large ones do";
}

TEST(Needs, ARequestMayLimitItself) {
  const auto needs = needs_of_small(asking({{"memory_cap", "--memory-cap", "1G", OptionKind::kText}}),
                                    100 * kMebi, false, kShare);
  ASSERT_TRUE(needs);
  EXPECT_EQ(needs->memory_bytes, 1024 * kMebi);
}

TEST(Needs, LocatingHoldsVectorsBesideTheFactor) {
  const JobForecast forecast{100 * kMebi, 200 * kMebi, 1, 1000 * kMebi};
  JobRequest locate = asking({});
  locate.command = "locate";
  const JobRequest check = asking({{"locate", "--locate", "", OptionKind::kFlag}});
  for (const JobRequest& request : {locate, check}) {
    EXPECT_EQ(bytes_expected(request, forecast), 1000 * kMebi);
    EXPECT_GE(needs_of(request, forecast, kShare)->memory_bytes, 1500 * kMebi);
  }
  EXPECT_EQ(bytes_expected(asking({}), forecast), 200 * kMebi);
  EXPECT_LT(needs_of(asking({}), forecast, kShare)->memory_bytes, 1000 * kMebi);
}

TEST(Needs, WhatCanNeverFitIsKnown) {
  EXPECT_FALSE(needs_of(asking({}), {5000 * kMebi, 6000 * kMebi, 1}, kShare));
  const auto tight = needs_of(asking({}), {3000 * kMebi, 9000 * kMebi, 1}, kShare);
  ASSERT_TRUE(tight) << "counting fits, keeping the factor does not";
  EXPECT_EQ(tight->memory_bytes, kShare.memory_bytes);
  const auto easy = needs_of(asking({}), {10 * kMebi, 100 * kMebi, 0.01}, kShare);
  ASSERT_TRUE(easy);
  EXPECT_EQ(easy->threads, 1);
  EXPECT_GE(easy->memory_bytes, 150 * kMebi);
  EXPECT_EQ(needs_of(asking({}), {kMebi, kMebi, 1e9}, kShare)->cpu_seconds, kShare.cpu_seconds);
  EXPECT_GT(least_memory(Offset{1} << 40, true), kShare.memory_bytes);
  EXPECT_EQ(least_memory(Offset{1} << 40, false), 0);
}

}  // namespace
}  // namespace stanchion::service
