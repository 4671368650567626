#include "stanchion/status.hpp"

#include <gtest/gtest.h>

#include <memory>

namespace stanchion {
namespace {

TEST(Status, SuccessByDefault) {
  const Status status;
  EXPECT_TRUE(status.ok());
  EXPECT_EQ(status.kind(), StatusKind::kOk);
  EXPECT_TRUE(status.to_string().empty());
}

TEST(Status, TextPutsThePlaceFirstAndTheRemedyLast) {
  const auto status = Status::bad_input("index-out-of-range", "row 9 of 8", "k.mtx:3", "check the header");
  EXPECT_FALSE(status.ok());
  EXPECT_EQ(status.to_string(), "k.mtx:3: row 9 of 8 [index-out-of-range]\n  remedy: check the header");
  EXPECT_EQ(Status(StatusKind::kBadUsage, "", "two shifts").to_string(), "two shifts");
}

TEST(Status, EveryMakerSetsItsKind) {
  EXPECT_EQ(Status::bad_input("a", "b", "c", "d").kind(), StatusKind::kBadInput);
  EXPECT_EQ(Status::bad_usage("a", "b", "c", "d").kind(), StatusKind::kBadUsage);
  EXPECT_EQ(Status::resource_limit("a", "b", "c", "d").kind(), StatusKind::kResourceLimit);
  EXPECT_EQ(Status::interrupted().kind(), StatusKind::kInterrupted);
  EXPECT_EQ(Status::internal("a").kind(), StatusKind::kInternal);
  EXPECT_EQ(Status::resource_limit("a", "b", "c", "d").code(), "a");
  EXPECT_EQ(Status::resource_limit("a", "b", "c", "d").message(), "b");
  EXPECT_EQ(Status::resource_limit("a", "b", "c", "d").place(), "c");
  EXPECT_EQ(Status::resource_limit("a", "b", "c", "d").remedy(), "d");
}

TEST(Result, HoldsAValueOrAStatus) {
  Result<int> good = 5;
  ASSERT_TRUE(good.ok());
  EXPECT_EQ(*good, 5);
  EXPECT_TRUE(good.status().ok());
  const Result<int> bad = Status::internal("oops");
  EXPECT_FALSE(bad.ok());
  EXPECT_EQ(bad.status().message(), "oops");
}

TEST(Result, CarriesWhatCanOnlyBeMoved) {
  Result<std::unique_ptr<int>> result = std::make_unique<int>(3);
  const std::unique_ptr<int> taken = std::move(result).value();
  EXPECT_EQ(*taken, 3);
}

}  // namespace
}  // namespace stanchion
