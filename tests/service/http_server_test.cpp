// Clients that are slow on purpose, or do not read: they lose their connection, others do not notice.
#include "service/http_server.hpp"

#include <arpa/inet.h>
#include <fcntl.h>
#include <gtest/gtest.h>
#include <sys/socket.h>
#include <unistd.h>

#include <atomic>
#include <thread>

#include "base/file_handle.hpp"
#include "service/problem.hpp"

namespace stanchion::service {
namespace {

using Clock = std::chrono::steady_clock;
using std::chrono::milliseconds;

class SlowClients : public testing::Test {
 protected:
  void SetUp() override {
    HttpLimits limits;
    limits.head_wait = milliseconds(400);
    limits.idle_wait = milliseconds(1500);
    limits.piece_wait = milliseconds(900);
    limits.body_grace = std::chrono::seconds(1);
    limits.body_bytes_per_second = 1000;
    server_ = std::make_unique<HttpServer>(
        [this](const HttpRequest& request) {
          HttpResponse response;
          response.content_type = "text/plain";
          if (request.head.path == "/large") response.body.assign(std::size_t{64} << 20, 'x');
          if (request.head.path == "/body") {
            const bool whole = request.read_body([](std::string_view) { return true; });
            broken_ = broken_ || !whole;
            if (!whole) response.status = 400;
          }
          return response;
        },
        [](int status, const std::string& code, const std::string& detail) {
          return problem_response(status, code, detail);
        },
        limits);
    const auto port = server_->start({"127.0.0.1", 0}, nullptr);
    ASSERT_TRUE(port.ok());
    port_ = *port;
  }

  FileHandle connect() const {
    FileHandle client(::socket(AF_INET, SOCK_STREAM | SOCK_CLOEXEC, 0));
    sockaddr_in address{};
    address.sin_family = AF_INET;
    address.sin_port = htons(static_cast<std::uint16_t>(port_));
    address.sin_addr.s_addr = htonl(INADDR_LOOPBACK);
    EXPECT_EQ(::connect(client.get(), reinterpret_cast<sockaddr*>(&address), sizeof address), 0);
    return client;
  }

  static bool send(const FileHandle& client, std::string_view text) {
    return ::send(client.get(), text.data(), text.size(), MSG_NOSIGNAL) == static_cast<ssize_t>(text.size());
  }

  /// What comes until the other end hangs up.
  static std::string rest_of(const FileHandle& client) {
    std::string text;
    char piece[4096];
    for (ssize_t got; (got = ::recv(client.get(), piece, sizeof piece, 0)) > 0;)
      text.append(piece, static_cast<std::size_t>(got));
    return text;
  }

  /// Sends `piece` again and again; how long that went well.
  static milliseconds drip(const FileHandle& client, std::string_view piece, milliseconds pause) {
    const auto began = Clock::now();
    char byte = 0;
    while (Clock::now() - began < std::chrono::seconds(20) && send(client, piece)) {
      if (::recv(client.get(), &byte, 1, MSG_DONTWAIT | MSG_PEEK) >= 0) break;
      std::this_thread::sleep_for(pause);
    }
    return std::chrono::duration_cast<milliseconds>(Clock::now() - began);
  }

  void expect_all_is_well() {
    const FileHandle client = connect();
    ASSERT_TRUE(send(client, "GET /live HTTP/1.1\r\nHost: localhost\r\nConnection: close\r\n\r\n"));
    EXPECT_EQ(rest_of(client).rfind("HTTP/1.1 200", 0), 0U);
  }

  std::unique_ptr<HttpServer> server_;
  std::atomic<bool> broken_{false};
  int port_ = 0;
};

TEST_F(SlowClients, AHeadThatTricklesIsAnsweredAndCutOff) {
  const FileHandle client = connect();
  ASSERT_TRUE(send(client, "GET /live HTTP/1.1\r\n"));
  const auto lasted = drip(client, "X", milliseconds(50));
  EXPECT_LT(lasted, std::chrono::seconds(10));
  EXPECT_EQ(rest_of(client).rfind("HTTP/1.1 408 ", 0), 0U);
  expect_all_is_well();
}

TEST_F(SlowClients, ABodyThatStopsIsCutOff) {
  const FileHandle client = connect();
  ASSERT_TRUE(send(client, "POST /body HTTP/1.1\r\nHost: localhost\r\nContent-Length: 1000\r\n\r\nbegin"));
  const auto began = Clock::now();
  EXPECT_EQ(rest_of(client).rfind("HTTP/1.1 400 ", 0), 0U);
  EXPECT_LT(Clock::now() - began, std::chrono::seconds(10));
  EXPECT_TRUE(broken_);
  expect_all_is_well();
}

TEST_F(SlowClients, ABodyThatTricklesIsCutOffAfterItsGrace) {
  const FileHandle client = connect();
  ASSERT_TRUE(send(client, "POST /body HTTP/1.1\r\nHost: localhost\r\nContent-Length: 100000\r\n\r\n"));
  const auto lasted = drip(client, "x", milliseconds(50));  // each piece in time, all together too slow
  EXPECT_GE(lasted, milliseconds(900));
  EXPECT_LT(lasted, std::chrono::seconds(10));
  EXPECT_TRUE(broken_);
  expect_all_is_well();
}

TEST_F(SlowClients, ChunksThatTrickleAreCutOff) {
  const FileHandle client = connect();
  ASSERT_TRUE(send(client, "POST /body HTTP/1.1\r\nHost: localhost\r\nTransfer-Encoding: chunked\r\n\r\n"));
  EXPECT_LT(drip(client, "1\r\nx\r\n", milliseconds(50)), std::chrono::seconds(10));
  EXPECT_TRUE(broken_);
}

TEST_F(SlowClients, ABodyThatIsFastEnoughIsTakenWhole) {
  const FileHandle client = connect();
  ASSERT_TRUE(
      send(client,
           "POST /body HTTP/1.1\r\nHost: localhost\r\nConnection: close\r\nContent-Length: 10000\r\n\r\n"));
  for (int piece = 0; piece < 20; ++piece) {
    ASSERT_TRUE(send(client, std::string(500, 'x')));
    std::this_thread::sleep_for(milliseconds(100));
  }
  EXPECT_EQ(rest_of(client).rfind("HTTP/1.1 200 ", 0), 0U);
  EXPECT_FALSE(broken_);
}

TEST_F(SlowClients, WhoSaysNothingIsHungUpOn) {
  const FileHandle client = connect();
  const auto began = Clock::now();
  EXPECT_EQ(rest_of(client), "");
  EXPECT_LT(Clock::now() - began, std::chrono::seconds(10));
}

TEST_F(SlowClients, WhoDoesNotReadHoldsNoThread) {
  const FileHandle client = connect();
  ASSERT_TRUE(send(client, "GET /large HTTP/1.1\r\nHost: localhost\r\n\r\n"));
  const auto until = Clock::now() + std::chrono::seconds(30);
  while ((server_->figures().accepted == 0 || server_->figures().open > 0) && Clock::now() < until)
    std::this_thread::sleep_for(milliseconds(20));
  EXPECT_EQ(server_->figures().open, 0U);
  expect_all_is_well();
}

TEST_F(SlowClients, WhoReadsInDripsHoldsNoThread) {
  const FileHandle client = connect();
  const int little = 4096;
  ::setsockopt(client.get(), SOL_SOCKET, SO_RCVBUF, &little, sizeof little);
  ASSERT_TRUE(send(client, "GET /large HTTP/1.1\r\nHost: localhost\r\n\r\n"));
  const auto began = Clock::now();
  char bytes[40];
  // Some of it goes out in every wait, all together far less than the least that is asked.
  while (server_->figures().open > 0 || server_->figures().accepted == 0) {
    ASSERT_LT(Clock::now() - began, std::chrono::seconds(30));
    [[maybe_unused]] const ssize_t got = ::recv(client.get(), bytes, sizeof bytes, MSG_DONTWAIT);
    std::this_thread::sleep_for(milliseconds(50));
  }
  expect_all_is_well();
}

TEST_F(SlowClients, TheEndWaitsForNoneOfThem) {
  const FileHandle head = connect(), body = connect(), silent = connect();
  ASSERT_TRUE(send(head, "GET /live HTT"));
  ASSERT_TRUE(send(body, "POST /body HTTP/1.1\r\nHost: localhost\r\nContent-Length: 1000\r\n\r\nbegin"));
  std::this_thread::sleep_for(milliseconds(100));
  const auto began = Clock::now();
  server_->stop();
  EXPECT_LT(Clock::now() - began, std::chrono::seconds(5));
}

}  // namespace
}  // namespace stanchion::service
