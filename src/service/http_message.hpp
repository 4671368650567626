// One request and one answer of HTTP, as the service sees them: no library's types.
#pragma once

#include <cstdint>
#include <functional>
#include <map>
#include <optional>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

namespace stanchion::service {

/// The head of a request, taken apart and found to be in order (see request_head.hpp).
struct RequestHead {
  std::string method;
  std::string target;                         ///< as sent
  std::string path;                           ///< decoded, without the query
  std::map<std::string, std::string> query;   ///< decoded
  std::map<std::string, std::string> fields;  ///< names in lower case
  std::optional<std::uint64_t> content_length;
  bool chunked = false;
  bool keep_alive = true;
  bool expects_continue = false;

  bool has_body() const { return chunked || content_length.value_or(0) > 0; }

  /// Empty when there is none; the name in lower case.
  const std::string& field(const std::string& name) const;
  std::optional<std::string> parameter(const std::string& name) const;
};

/// Takes a piece of a body; false stops the transfer.
using Sink = std::function<bool(std::string_view)>;

struct HttpRequest {
  const RequestHead& head;
  std::string peer;  ///< address of the other end, as text
  bool encrypted = false;

  /// Passes the body on in pieces; false when it broke off or the sink stopped it. At most once.
  std::function<bool(const Sink&)> read_body;
};

struct HttpResponse {
  int status = 200;
  std::string content_type;  ///< empty: no body
  std::string body;
  std::vector<std::pair<std::string, std::string>> fields;

  /// Instead of `body`: a file of which `file_bytes` bytes are sent. Closed by the server.
  int file = -1;
  std::uint64_t file_bytes = 0;

  /// Instead of `body`: called once, writes until it returns; the connection is closed afterwards.
  std::function<void(const Sink&)> stream;
};

const char* reason_phrase(int status);

}  // namespace stanchion::service
