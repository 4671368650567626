#include "model/byte_size.hpp"

#include <gtest/gtest.h>

namespace stanchion {
namespace {

TEST(ByteSize, UnitsArePowersOf1024) {
  const std::pair<const char*, Offset> cases[] = {
      {"4096", 4096},          {"64k", 64 << 10},           {"512M", 512 << 20}, {"8G", Offset{8} << 30},
      {"2T", Offset{2} << 40}, {"1.5GiB", Offset{3} << 29}, {"10MB", 10 << 20},  {"7b", 7}};
  for (const auto& [text, bytes] : cases) {
    const auto parsed = parse_byte_size(text);
    ASSERT_TRUE(parsed.ok()) << text;
    EXPECT_EQ(*parsed, bytes) << text;
  }
}

TEST(ByteSize, RefusesWhatIsNoPositiveAmount) {
  for (const char* text : {"", "G", "8Q", "8GG", "-1G", "0", "0.2", "nan", "inf", "1e30", "8 G", "8G "}) {
    const auto parsed = parse_byte_size(text);
    ASSERT_FALSE(parsed.ok()) << text;
    EXPECT_EQ(parsed.status().kind(), StatusKind::kBadUsage);
    EXPECT_EQ(parsed.status().code(), "bad-size");
    EXPECT_FALSE(parsed.status().remedy().empty());
  }
}

TEST(ByteSize, InWordsNeverSaysThatALimitSuffices) {
  EXPECT_EQ(size_needed(1), "1 B");
  EXPECT_EQ(size_needed(1025), "2 KiB");
  EXPECT_EQ(size_needed((1 << 20) + 1), "2 MiB");
  EXPECT_EQ(size_allowed(1025), "1 KiB");
  EXPECT_EQ(size_allowed((1 << 20) - 1), "1023 KiB");
  EXPECT_EQ(size_allowed(Offset{8} << 30), "8192 MiB");
  EXPECT_EQ(size_needed(Offset{1} << 62), "4398046511104 MiB");
}

}  // namespace
}  // namespace stanchion
