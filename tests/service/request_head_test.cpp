// Heads of requests by the letter of RFC 9112 (HTTP/1.1), sections 2 to 7; see also security_test.py.
#include "service/request_head.hpp"

#include <gtest/gtest.h>

#include <random>

namespace stanchion::service {
namespace {

int status_of(const std::string& head) {
  RequestHead result;
  return read_head(head, result).status;
}

TEST(RequestHead, IsTakenApart) {
  RequestHead head;
  ASSERT_EQ(
      read_head("GET /v1/files?path=a%2Fb+c&x= HTTP/1.1\r\nHost: h:1\r\nX-A: 1\r\nx-a:  2 \r\n\r\n", head)
          .status,
      0);
  EXPECT_EQ(head.path, "/v1/files");
  EXPECT_EQ(head.parameter("path"), "a/b c");
  EXPECT_EQ(head.parameter("x"), "");
  EXPECT_FALSE(head.parameter("y"));
  EXPECT_EQ(head.field("x-a"), "1, 2");
  EXPECT_TRUE(head.keep_alive);
  EXPECT_FALSE(head.has_body());
  ASSERT_EQ(read_head("POST /a HTTP/1.0\r\nHost: h\r\nContent-Length: 12\r\n\r\n", head).status, 0);
  EXPECT_FALSE(head.keep_alive);
  EXPECT_EQ(head.content_length, 12);
}

TEST(RequestHead, AmbiguousOnesAreRefused) {
  EXPECT_EQ(status_of(""), 400);
  EXPECT_EQ(status_of("\r\n\r\n"), 400);
  EXPECT_EQ(status_of("GET / HTTP/1.1\r\nHost: a\r\n"), 400);  // no empty line
  EXPECT_EQ(status_of("GET / HTTP/1.1\r\nHost : a\r\n\r\n"), 400);
  EXPECT_EQ(status_of("GET / HTTP/1.1\r\nHost: a\r\nContent-Length: +1\r\n\r\n"), 400);
  EXPECT_EQ(status_of("POST / HTTP/1.0\r\nHost: a\r\nTransfer-Encoding: chunked\r\n\r\n"), 400);
  EXPECT_EQ(status_of("POST / HTTP/1.1\r\nHost: a\r\nTransfer-Encoding: chunked, chunked\r\n\r\n"), 501);
  EXPECT_EQ(status_of("GET /?a=1&a=2 HTTP/1.1\r\nHost: a\r\n\r\n"), 400);
  EXPECT_EQ(status_of("GET /#a HTTP/1.1\r\nHost: a\r\n\r\n"), 400);
}

TEST(RequestHead, AnyBytesAreTakenOrRefused) {
  std::mt19937 random(20260301);
  const std::string seed =
      "POST /v1/jobs?limit=3 HTTP/1.1\r\nHost: localhost\r\nContent-Length: 10\r\nOrigin: http://a\r\n\r\n";
  int taken = 0;
  for (int k = 0; k < 20000; ++k) {
    std::string head = seed;
    for (int change = 0; change < 3; ++change) {
      const std::size_t at = random() % head.size();
      if (random() % 3 == 0) {
        head.erase(at, random() % 5);
        if (head.empty()) head = "x";
      } else {
        head[at] = static_cast<char>(random() % 256);
      }
    }
    RequestHead result;
    const HeadRefusal refusal = read_head(head, result);
    if (refusal.status == 0) {
      ++taken;
      EXPECT_EQ(result.path[0], '/');
      EXPECT_EQ(result.fields.count("host"), 1U);
    } else {
      EXPECT_GE(refusal.status, 400);
      EXPECT_LT(refusal.status, 506);
      EXPECT_FALSE(refusal.detail.empty());
    }
  }
  EXPECT_GT(taken, 500);
  EXPECT_LT(taken, 19500);
}

}  // namespace
}  // namespace stanchion::service
