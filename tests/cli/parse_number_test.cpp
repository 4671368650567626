#include <gtest/gtest.h>

#include "cli/arguments.hpp"

namespace stanchion::cli {
namespace {

TEST(ParseNumber, RealNumbersAsPeopleWriteThem) {
  const std::pair<const char*, double> cases[] = {{"1.5", 1.5}, {"-1.5", -1.5},   {"+2", 2},    {".5", 0.5},
                                                  {"2.", 2},    {"-15e-1", -1.5}, {"1E6", 1e6}, {"-0", -0.0}};
  for (const auto& [text, number] : cases) {
    const auto parsed = parse_real("--at", text);
    ASSERT_TRUE(parsed.ok()) << text;
    EXPECT_EQ(*parsed, number) << text;
  }
}

TEST(ParseNumber, AnythingElseIsRefusedWithTheOption) {
  for (const char* text : {"", " 1", "1 ", "1,5", "0x10", "nan", "inf", "1e999", "+-1", "--1", "1e", "one"}) {
    const auto parsed = parse_real("--at", text);
    ASSERT_FALSE(parsed.ok()) << text;
    EXPECT_EQ(parsed.status().code(), "bad-number");
    EXPECT_EQ(parsed.status().place(), "--at");
  }
}

TEST(ParseNumber, WholeNumbersHaveNoPoint) {
  EXPECT_EQ(*parse_whole("--seed", "-7"), -7);
  EXPECT_EQ(*parse_whole("--seed", "+9007199254740993"), 9007199254740993);
  for (const char* text : {"", "1.0", "1e3", "99999999999999999999"}) {
    EXPECT_FALSE(parse_whole("--seed", text).ok()) << text;
  }
}

}  // namespace
}  // namespace stanchion::cli
