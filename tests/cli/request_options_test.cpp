#include "cli/request_options.hpp"

#include <gtest/gtest.h>

namespace stanchion::cli {
namespace {

RequestOptions plain() {
  RequestOptions options;
  options.stiffness = "K.mtx";
  return options;
}

TEST(RequestOptions, AddedMatricesAreSplitAtTheLastColon) {
  RequestOptions options = plain();
  options.added = {"C:\\models\\G.mtx:1.35", "soil.mtx:-2"};
  const auto request = build_request(options, Question::kCheck);
  ASSERT_TRUE(request.ok()) << request.status().to_string();
  ASSERT_EQ(request->input.added.size(), 2U);
  EXPECT_EQ(request->input.added[0].path, "C:\\models\\G.mtx");
  EXPECT_EQ(request->input.added[0].factor, 1.35);
  EXPECT_EQ(request->input.added[1].factor, -2);
}

TEST(RequestOptions, ShiftsKeepTheirOrderOverSeveralLists) {
  RequestOptions options = plain();
  options.shifts = {"3,-1", "2"};
  const auto request = build_request(options, Question::kCount);
  ASSERT_TRUE(request.ok());
  EXPECT_EQ(request->shifts, (std::vector<double>{3, -1, 2}));
  EXPECT_EQ(request->pencil, Pencil::kStiffness);
}

TEST(RequestOptions, ThePencilFollowsFromTheSecondMatrix) {
  RequestOptions options = plain();
  options.shifts = {"1"};
  options.geometric = "G.mtx";
  options.load_sign = "minus";
  const auto geometric = build_request(options, Question::kCount);
  ASSERT_TRUE(geometric.ok());
  EXPECT_EQ(geometric->pencil, Pencil::kGeometric);
  EXPECT_TRUE(geometric->input.load_sign_minus);
  options.mass = "M.mtx";
  EXPECT_EQ(build_request(options, Question::kCount).status().code(), "contradiction");
  options.geometric.reset();
  options.load_sign.reset();
  EXPECT_EQ(build_request(options, Question::kCount)->pencil, Pencil::kMass);
}

TEST(RequestOptions, NumbersTooLargeForTheirMemberAreOutOfRange) {
  RequestOptions options = plain();
  options.rows = std::int64_t{1} << 40;
  EXPECT_EQ(build_request(options, Question::kCheck).status().place(), "--rows");
  options.rows.reset();
  options.threads = 0;
  EXPECT_EQ(build_request(options, Question::kCheck).status().place(), "--threads");
}

TEST(RequestOptions, MemoryCapsCarryTheOptionAsTheirPlace) {
  RequestOptions options = plain();
  options.memory_cap = "512M";
  EXPECT_EQ(build_request(options, Question::kCheck)->memory_cap_bytes, Offset{512} << 20);
  options.memory_cap = "much";
  EXPECT_EQ(build_request(options, Question::kCheck).status().place(), "--memory-cap");
}

}  // namespace
}  // namespace stanchion::cli
