#include <gtest/gtest.h>

#include "io/fortran_format.hpp"
#include "matrices.hpp"
#include "temp_folder.hpp"

namespace stanchion {
namespace {

TEST(FortranFormat, CustomaryFormatsAreUnderstood) {
  const auto same = [](const char* text, int per_line, int width, int skip, int decimals, int scale,
                       bool real) {
    const auto f = parse_fortran_format(text);
    ASSERT_TRUE(f.has_value()) << text;
    EXPECT_EQ(f->per_line, per_line) << text;
    EXPECT_EQ(f->width, width) << text;
    EXPECT_EQ(f->skip, skip) << text;
    EXPECT_EQ(f->decimals, decimals) << text;
    EXPECT_EQ(f->scale, scale) << text;
    EXPECT_EQ(f->real, real) << text;
  };
  same("(16I5)", 16, 5, 0, 0, 0, false);
  same("(1P,5E16.9)", 5, 16, 0, 9, 1, true);
  same("(1P5D16.9)", 5, 16, 0, 9, 1, true);
  same(" ( 3e26.18 )", 3, 26, 0, 18, 0, true);
  same("(4(1X,E18.10E3))", 4, 18, 1, 10, 0, true);
  same("(10F7.1)", 10, 7, 0, 1, 0, true);
  same("(E20.12)", 1, 20, 0, 12, 0, true);
  same("(-2P,4G20.12)", 4, 20, 0, 12, -2, true);
  for (const char* text :
       {"", "16I5", "(16I5", "(A8)", "(3E26.18,2X)", "(0I5)", "(5I0)", "(99999I5)", "(3E)", "(3E5.)"}) {
    EXPECT_FALSE(parse_fortran_format(text).has_value()) << text;
  }
}

double field(std::string_view line, int number, const char* format) {
  double value = -7;
  EXPECT_EQ(read_fortran_real(line, number, *parse_fortran_format(format), value), NumberFault::kNone)
      << line;
  return value;
}

TEST(FortranFormat, FieldsAreReadByColumn) {
  EXPECT_EQ(field("-1.5E+00-2.5E+00", 1, "(2E8.1)"), -2.5);
  EXPECT_EQ(field("  1.25D3", 0, "(1E8.1)"), 1250);
  EXPECT_EQ(field("1.5+103", 0, "(1E7.1)"), 1.5e103);
  EXPECT_EQ(field("  12345", 0, "(1F7.2)"), 123.45);
  EXPECT_EQ(field("12345E2", 0, "(1E7.2)"), 12345);
  EXPECT_EQ(field(" 1 2.5 ", 0, "(1F7.2)"), 12.5);
  EXPECT_EQ(field("   12.5", 0, "(1P,1F7.2)"), 1.25);
  EXPECT_EQ(field("12.5E00", 0, "(1P,1E7.2)"), 12.5);
  double value = 0;
  const auto format = *parse_fortran_format("(2E8.1)");
  EXPECT_EQ(read_fortran_real("1.0", 1, format, value), NumberFault::kMissing);
  EXPECT_EQ(read_fortran_real("    NaN ", 0, format, value), NumberFault::kNotFinite);
  EXPECT_EQ(read_fortran_real("Infinity", 0, format, value), NumberFault::kNotFinite);
  EXPECT_EQ(read_fortran_real("1.0E9999", 0, format, value), NumberFault::kOverflow);
  EXPECT_EQ(read_fortran_real("1.0E    ", 0, format, value), NumberFault::kUnreadable);
  EXPECT_EQ(read_fortran_real("........", 0, format, value), NumberFault::kUnreadable);
}

TEST(Boeing, UnsymmetricTypeIsCheckedForSymmetry) {
  std::string text =
      testing::file_bytes(std::string(STANCHION_DATA) + "/examples/rutherford_boeing/valid.rb");
  text.replace(text.find("rsa"), 3, "rua");
  const auto file = testing::read_text(text);
  ASSERT_TRUE(file.ok());
  EXPECT_NE(testing::find_warning(file->warnings, "lower-triangle"), nullptr);
}

TEST(Boeing, HeadersAreRefusedByReason) {
  const std::string good =
      testing::file_bytes(std::string(STANCHION_DATA) + "/examples/rutherford_boeing/valid.rb");
  const auto code = [&good](const std::string& from, const std::string& to) {
    std::string text = good;
    text.replace(text.find(from), from.size(), to);
    return testing::read_text(text).status().code();
  };
  EXPECT_EQ(code("rsa", "psa"), "pattern-matrix");
  EXPECT_EQ(code("rsa", "csa"), "complex-matrix");
  EXPECT_EQ(code("rsa", "rza"), "skew-symmetric");
  EXPECT_EQ(code("rsa", "cha"), "complex-matrix");
  EXPECT_EQ(code("rsa                        4             4", "rsa                        4             5"),
            "not-square");
  EXPECT_EQ(code("(13I6)          (13I6)", "(13I6)          (12A6)"), "bad-format");
  EXPECT_EQ(code("(3E26.16)", "(2E26.16)"), "wrong-count");
  EXPECT_EQ(code("2.0000000000000000E+03", "2.0000000000000000E+3x"), "bad-number");
}

}  // namespace
}  // namespace stanchion
