#include "base/digest.hpp"

#include <gtest/gtest.h>

#include <cstring>
#include <random>

namespace stanchion {
namespace {

// FIPS 180-4 example messages, and the empty one.
TEST(Sha256, PublishedDigests) {
  EXPECT_EQ(sha256(""), "e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855");
  EXPECT_EQ(sha256("abc"), "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
  EXPECT_EQ(sha256("abcdbcdecdefdefgefghfghighijhijkijkljklmklmnlmnomnopnopq"),
            "248d6a61d20638b8e5c026930c3e6039a33ce45964ff2167f6ecedd419db06c1");
  EXPECT_EQ(sha256(std::string(1000000, 'a')),
            "cdc76e5c9914fb9281a1c7e284d73e67f1809a48a497200e046d39ccc7112cd0");
}

TEST(Sha256, PiecesGiveTheDigestOfTheWhole) {
  std::mt19937 random(5);
  std::string text(10000, ' ');
  for (char& c : text) c = static_cast<char>(random());
  for (const std::size_t step : {1U, 7U, 63U, 64U, 65U, 1000U}) {
    Sha256 digest;
    for (std::size_t at = 0; at < text.size(); at += step)
      digest.update(std::string_view(text).substr(at, step));
    EXPECT_EQ(digest.finish(), sha256(text)) << step;
  }
}

TEST(Sha256, BothBlockFunctionsAgree) {
  if (!detail::sha_instructions()) return;
  std::mt19937 random(6);
  unsigned char data[64 * 9];
  for (auto& byte : data) byte = static_cast<unsigned char>(random());
  std::uint32_t plain[8] = {1, 2, 3, 4, 5, 6, 7, 8}, native[8] = {1, 2, 3, 4, 5, 6, 7, 8};
  detail::sha256_blocks_plain(plain, data, 9);
  detail::sha256_blocks_native(native, data, 9);
  EXPECT_EQ(std::memcmp(plain, native, sizeof plain), 0);
}

}  // namespace
}  // namespace stanchion
