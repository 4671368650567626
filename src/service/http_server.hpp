// Listens, holds connections within limits, and passes requests on; a thread a connection.
#pragma once

#include <chrono>
#include <cstdint>
#include <functional>
#include <memory>
#include <string>

#include "service/channel.hpp"
#include "service/http_message.hpp"
#include "stanchion/status.hpp"

namespace stanchion::service {

struct HttpLimits {
  int connections = 512;
  Milliseconds head_wait{10'000};              ///< for the whole head, from its first byte
  Milliseconds idle_wait{60'000};              ///< between requests
  Milliseconds piece_wait{15'000};             ///< for some bytes of a body to come, or to go out
  std::uint64_t body_bytes_per_second = 1024;  ///< slower bodies are broken off once `body_grace` is over
  std::chrono::seconds body_grace{30};
  int requests_per_connection = 100'000;
};

struct HttpAddress {
  std::string host = "127.0.0.1";
  int port = 0;  ///< 0: any free one
};

/// Answers one request; called from many threads at once. Exceptions become status 500.
using HttpHandler = std::function<HttpResponse(const HttpRequest&)>;

/// Makes the answer for a request that never reaches the handler, for instance a malformed one.
using HttpRefusal =
    std::function<HttpResponse(int status, const std::string& code, const std::string& detail)>;

struct HttpFigures {
  std::uint64_t accepted = 0, turned_away = 0, open = 0;
};

class HttpServer {
 public:
  HttpServer(HttpHandler handler, HttpRefusal refusal, HttpLimits limits);
  ~HttpServer();
  HttpServer(const HttpServer&) = delete;
  HttpServer& operator=(const HttpServer&) = delete;

  /// Binds and begins to answer; the port bound. Resource limit "cannot-listen". `encryption` may be null.
  Result<int> start(const HttpAddress& address, std::shared_ptr<Encryption> encryption);

  /// Accepts nothing more, ends idle connections, waits for requests under way; streams have to end by
  /// themselves.
  void stop();

  HttpFigures figures() const;

 private:
  struct Parts;
  std::unique_ptr<Parts> parts_;
};

/// Whether the host is this machine alone: a numeric address in 127.0.0.0/8, or ::1, or localhost.
bool is_loopback(const std::string& host);

}  // namespace stanchion::service
