#include "io/number.hpp"

#include <gtest/gtest.h>

#include <limits>
#include <string_view>

namespace stanchion {
namespace {

NumberFault real(std::string_view text, double& value) {
  const char* p = text.data();
  const NumberFault fault = scan_real(p, text.data() + text.size(), value);
  EXPECT_TRUE(fault != NumberFault::kNone || p == text.data() + text.size()) << text;
  return fault;
}

TEST(Number, RealsInEveryCustomaryNotation) {
  const std::pair<const char*, double> cases[] = {{"1", 1},
                                                  {"+1.5", 1.5},
                                                  {"-1.5e+03", -1500},
                                                  {"1.5D+03", 1500},
                                                  {"1.5d3", 1500},
                                                  {".5", 0.5},
                                                  {"5.", 5},
                                                  {"1.5+103", 1.5e103},
                                                  {"-1.5-103", -1.5e-103},
                                                  {"0e5", 0},
                                                  {"0.000e999999", 0},
                                                  {"4.9e-324", 4.9e-324},
                                                  {"1.7976931348623157e308", 1.7976931348623157e308}};
  for (const auto& [text, wanted] : cases) {
    double value = -7;
    EXPECT_EQ(real(text, value), NumberFault::kNone) << text;
    EXPECT_EQ(value, wanted) << text;
  }
}

TEST(Number, WhatIsNoRealIsRefusedForItsReason) {
  const std::pair<const char*, NumberFault> cases[] = {{"", NumberFault::kMissing},
                                                       {"x", NumberFault::kUnreadable},
                                                       {"1.5N", NumberFault::kUnreadable},
                                                       {"1e400", NumberFault::kOverflow},
                                                       {"-1e400", NumberFault::kOverflow},
                                                       {"1D+400", NumberFault::kOverflow},
                                                       {"123456789e301", NumberFault::kOverflow},
                                                       {"1e-400", NumberFault::kUnderflow},
                                                       {"-1D-400", NumberFault::kUnderflow},
                                                       {"2.4e-324", NumberFault::kUnderflow},
                                                       {"nan", NumberFault::kNotFinite},
                                                       {"-inf", NumberFault::kNotFinite},
                                                       {"++1", NumberFault::kUnreadable},
                                                       {"+-1", NumberFault::kUnreadable},
                                                       {"1e5e5", NumberFault::kUnreadable},
                                                       {"0x10", NumberFault::kUnreadable},
                                                       {"1.2.3", NumberFault::kUnreadable},
                                                       {"--1", NumberFault::kUnreadable}};
  for (const auto& [text, wanted] : cases) {
    double value = 0;
    EXPECT_EQ(real(text, value), wanted) << text;
  }
}

TEST(Number, WholeValuesSayWhenTheyRound) {
  const auto scan = [](std::string_view text, double& value, bool& exact) {
    const char* p = text.data();
    return scan_integer_value(p, text.data() + text.size(), value, exact);
  };
  double value = 0;
  bool exact = false;
  EXPECT_EQ(scan("9007199254740992", value, exact), NumberFault::kNone);
  EXPECT_TRUE(exact);
  EXPECT_EQ(scan("-9007199254740993", value, exact), NumberFault::kNone);
  EXPECT_FALSE(exact);
  EXPECT_EQ(scan("+4611686018427387904", value, exact), NumberFault::kNone);
  EXPECT_TRUE(exact);
  EXPECT_EQ(scan("99999999999999999999", value, exact), NumberFault::kNone);
  EXPECT_FALSE(exact);
  EXPECT_EQ(scan("1.5", value, exact), NumberFault::kUnreadable);
  EXPECT_EQ(scan("1e5", value, exact), NumberFault::kUnreadable);
}

}  // namespace
}  // namespace stanchion
