// Tokens, origins, rates, addresses.
#include <gtest/gtest.h>

#include "service/http_server.hpp"
#include "service/origin.hpp"
#include "service/rate_limit.hpp"
#include "service/service.hpp"
#include "service/tokens.hpp"

namespace stanchion::service {
namespace {

TEST(Access, ComparesEveryCharacter) {
  EXPECT_TRUE(equal_in_constant_time("abc", "abc"));
  EXPECT_FALSE(equal_in_constant_time("abc", "abd"));
  EXPECT_FALSE(equal_in_constant_time("abc", "ab"));
  EXPECT_FALSE(equal_in_constant_time(std::string_view("a\0b", 3), std::string_view("a\0c", 3)));
}

TEST(Access, HostNames) {
  EXPECT_EQ(host_name_of("LocalHost:80"), "localhost");
  EXPECT_EQ(host_name_of("[::1]:80"), "::1");
  EXPECT_EQ(host_name_of("[::1"), "");
  EXPECT_EQ(host_name_of(""), "");
}

TEST(Access, LoopbackIsNumericOrLocalhost) {
  for (const char* host : {"127.0.0.1", "127.9.9.9", "::1", "localhost"})
    EXPECT_TRUE(is_loopback(host)) << host;
  for (const char* host :
       {"0.0.0.0", "::", "10.0.0.1", "127.0.0.1.example", "127.evil", "localhost.example", ""}) {
    EXPECT_FALSE(is_loopback(host)) << host;
  }
}

TEST(Access, ExposureHasItsConditions) {
  ServiceOptions options;
  EXPECT_TRUE(check_exposure(options).ok());
  options.address.host = "192.0.2.1";
  EXPECT_EQ(check_exposure(options).code(), "no-tokens");
  options.token_file = "tokens";
  EXPECT_EQ(check_exposure(options).code(), "not-encrypted");
  options.behind_proxy = true;
  EXPECT_TRUE(check_exposure(options).ok());
  options.behind_proxy = false;
  options.tls_certificate = "c";
  EXPECT_EQ(check_exposure(options).code(), "contradiction");
  options.tls_key = "k";
  EXPECT_TRUE(check_exposure(options).ok());
}

TEST(Access, RateRefills) {
  RateLimit limit(10, 3);
  RateLimit::Time now{};
  for (int k = 0; k < 3; ++k) EXPECT_TRUE(limit.allow("a", now));
  EXPECT_FALSE(limit.allow("a", now));
  EXPECT_TRUE(limit.allow("b", now));
  now += std::chrono::milliseconds(100);
  EXPECT_TRUE(limit.allow("a", now));
  EXPECT_FALSE(limit.allow("a", now));
  // Ten thousand addresses do not fill the memory, and do not lock out those who come later.
  for (int k = 0; k < 10000; ++k) limit.allow("c" + std::to_string(k), now);
  now += std::chrono::seconds(10);
  EXPECT_TRUE(limit.allow("d", now));
}

}  // namespace
}  // namespace stanchion::service
