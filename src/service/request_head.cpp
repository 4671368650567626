#include "service/request_head.hpp"

#include <algorithm>
#include <array>
#include <charconv>

namespace stanchion::service {
namespace {

/// Fields that one request may hold once only, because they decide where it ends or whom it is from.
constexpr std::array<std::string_view, 9> kOnce = {
    "host",          "content-length",  "content-type", "content-encoding", "transfer-encoding", "origin",
    "authorization", "idempotency-key", "expect"};
constexpr std::array<std::string_view, 5> kMethods = {"GET", "HEAD", "POST", "PUT", "DELETE"};
constexpr std::array<std::string_view, 4> kOtherMethods = {"OPTIONS", "PATCH", "TRACE", "CONNECT"};

bool is_token_character(char c) {
  return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') ||
         std::string_view("!#$%&'*+-.^_`|~").find(c) != std::string_view::npos;
}

bool is_token(std::string_view text) {
  return !text.empty() && std::all_of(text.begin(), text.end(), is_token_character);
}

/// Visible characters, spaces and tabs; bytes above 127 are opaque.
bool is_field_value(std::string_view text) {
  return std::all_of(text.begin(), text.end(), [](char c) {
    const auto byte = static_cast<unsigned char>(c);
    return byte == '\t' || (byte >= 0x20 && byte != 0x7f);
  });
}

char lower(char c) {
  return c >= 'A' && c <= 'Z' ? static_cast<char>(c - 'A' + 'a') : c;
}

std::string lowered(std::string_view text) {
  std::string result(text);
  std::transform(result.begin(), result.end(), result.begin(), lower);
  return result;
}

std::string_view trimmed(std::string_view text) {
  const auto blank = [](char c) { return c == ' ' || c == '\t'; };
  while (!text.empty() && blank(text.front())) text.remove_prefix(1);
  while (!text.empty() && blank(text.back())) text.remove_suffix(1);
  return text;
}

int digit_of(char c) {
  if (c >= '0' && c <= '9') return c - '0';
  if (lower(c) >= 'a' && lower(c) <= 'f') return lower(c) - 'a' + 10;
  return -1;
}

template <class List>
bool contains(const List& list, std::string_view word) {
  return std::find(list.begin(), list.end(), word) != list.end();
}

HeadRefusal bad(std::string detail) {
  return {400, "bad-request", std::move(detail)};
}

HeadRefusal read_query(std::string_view text, RequestHead& result) {
  while (!text.empty()) {
    const std::size_t end = std::min(text.find('&'), text.size());
    const std::string_view pair = text.substr(0, end);
    text.remove_prefix(std::min(end + 1, text.size()));
    if (pair.empty()) continue;
    const std::size_t equals = std::min(pair.find('='), pair.size());
    std::string name, value;
    if (!decode_percent(pair.substr(0, equals), true, name) ||
        !decode_percent(pair.substr(std::min(equals + 1, pair.size())), true, value)) {
      return bad("the query holds a broken %-sequence or a control character");
    }
    if (!result.query.emplace(name, value).second) return bad("the query has a parameter twice");
  }
  return {};
}

HeadRefusal read_target(std::string_view target, const HeadLimits& limits, RequestHead& result) {
  if (target.size() > limits.target_bytes) {
    return {414, "target-too-long", "the target of the request is longer than 2,048 bytes"};
  }
  const bool visible = std::all_of(target.begin(), target.end(), [](char c) { return c > ' ' && c < 0x7f; });
  if (target.empty() || target[0] != '/' || !visible || target.find('#') != std::string_view::npos) {
    return bad("the target has to be a path that begins with a slash");
  }
  result.target = target;
  const std::size_t question = std::min(target.find('?'), target.size());
  if (!decode_percent(target.substr(0, question), false, result.path)) {
    return bad("the path holds a broken %-sequence or a control character");
  }
  return read_query(target.substr(std::min(question + 1, target.size())), result);
}

HeadRefusal read_request_line(std::string_view line, const HeadLimits& limits, RequestHead& result) {
  const std::size_t first = line.find(' '), last = line.rfind(' ');
  if (first == std::string_view::npos || first == last) return bad("the request line has three parts");
  const std::string_view method = line.substr(0, first), version = line.substr(last + 1);
  if (!is_token(method)) return bad("the method is no word");
  if (version != "HTTP/1.1" && version != "HTTP/1.0") {
    if (version.substr(0, 5) == "HTTP/") return {505, "http-version", "HTTP/1.1 is spoken here"};
    return bad("the request line does not end in the version of HTTP");
  }
  if (contains(kOtherMethods, method)) return {405, "method-not-allowed", "this method is not served"};
  if (!contains(kMethods, method)) return {501, "unknown-method", "this method is not known"};
  result.method = method;
  result.keep_alive = version == "HTTP/1.1";
  return read_target(line.substr(first + 1, last - first - 1), limits, result);
}

HeadRefusal read_field(std::string_view line, RequestHead& result) {
  const std::size_t colon = line.find(':');
  if (colon == std::string_view::npos || !is_token(line.substr(0, colon))) {
    return bad("a header field has no name, or a name that is no word");
  }
  const std::string name = lowered(line.substr(0, colon));
  const std::string_view value = trimmed(line.substr(colon + 1));
  if (!is_field_value(value)) return bad("a header field holds a control character");
  const auto [place, is_new] = result.fields.emplace(name, value);
  if (is_new) return {};
  if (contains(kOnce, name)) return bad("the header field " + name + " is there twice");
  place->second += ", ";
  place->second += value;
  return {};
}

/// Where the body ends.
HeadRefusal read_length(RequestHead& result) {
  const std::string& length = result.field("content-length");
  const std::string& coding = result.field("transfer-encoding");
  if (result.fields.count("content-length") != 0) {
    std::uint64_t bytes = 0;
    const auto parsed = std::from_chars(length.data(), length.data() + length.size(), bytes);
    if (length.empty() || parsed.ec != std::errc{} || parsed.ptr != length.data() + length.size()) {
      return bad("Content-Length is no number");
    }
    result.content_length = bytes;
  }
  if (result.fields.count("transfer-encoding") != 0) {
    if (result.content_length) return bad("Content-Length and Transfer-Encoding exclude each other");
    if (lowered(coding) != "chunked") {
      return {501, "transfer-encoding", "the only transfer coding served is chunked"};
    }
    if (!result.keep_alive) return bad("HTTP/1.0 knows no chunks");
    result.chunked = true;
  }
  const bool may_have_body = result.method == "POST" || result.method == "PUT";
  if (result.has_body() && !may_have_body) return bad("a body belongs to POST and PUT only");
  if (may_have_body && !result.content_length && !result.chunked) {
    return {411, "length-required", "Content-Length is missing"};
  }
  return {};
}

HeadRefusal read_connection(RequestHead& result) {
  if (result.field("host").empty()) return bad("the header field Host is missing");
  const std::string connection = lowered(result.field("connection"));
  if (connection.find("close") != std::string::npos) result.keep_alive = false;
  if (const std::string& expect = result.field("expect"); !expect.empty()) {
    if (lowered(expect) != "100-continue") return {417, "expectation", "only 100-continue can be expected"};
    result.expects_continue = true;
  }
  return {};
}

}  // namespace

const std::string& RequestHead::field(const std::string& name) const {
  static const std::string none;
  const auto found = fields.find(name);
  return found == fields.end() ? none : found->second;
}

std::optional<std::string> RequestHead::parameter(const std::string& name) const {
  const auto found = query.find(name);
  if (found == query.end()) return std::nullopt;
  return found->second;
}

bool decode_percent(std::string_view text, bool plus_is_space, std::string& result) {
  result.clear();
  for (std::size_t k = 0; k < text.size(); ++k) {
    char c = text[k];
    if (c == '%') {
      if (k + 2 >= text.size()) return false;
      const int high = digit_of(text[k + 1]), low = digit_of(text[k + 2]);
      if (high < 0 || low < 0) return false;
      c = static_cast<char>(16 * high + low);
      k += 2;
    } else if (c == '+' && plus_is_space) {
      c = ' ';
    }
    const auto byte = static_cast<unsigned char>(c);
    if (byte < 0x20 || byte == 0x7f) return false;
    result += c;
  }
  return true;
}

HeadRefusal read_head(std::string_view head, RequestHead& result, const HeadLimits& limits) {
  result = {};
  if (head.size() > limits.bytes) {
    return {431, "head-too-long", "the head of the request is longer than 16 KiB"};
  }
  bool first = true;
  std::size_t fields = 0;
  while (true) {
    const std::size_t end = head.find("\r\n");
    if (end == std::string_view::npos) return bad("a line does not end in carriage return and line feed");
    const std::string_view line = head.substr(0, end);
    head.remove_prefix(end + 2);
    if (line.find('\n') != std::string_view::npos || line.find('\r') != std::string_view::npos) {
      return bad("a line does not end in carriage return and line feed");
    }
    if (line.empty()) break;
    HeadRefusal refusal;
    if (first) {
      refusal = read_request_line(line, limits, result);
    } else if (++fields > limits.fields) {
      refusal = {431, "too-many-fields", "the request has more than 64 header fields"};
    } else {
      refusal = read_field(line, result);
    }
    if (refusal.status != 0) return refusal;
    first = false;
  }
  if (first) return bad("the request line is missing");
  if (HeadRefusal refusal = read_connection(result); refusal.status != 0) return refusal;
  return read_length(result);
}

const char* reason_phrase(int status) {
  switch (status) {
    case 200:
      return "OK";
    case 201:
      return "Created";
    case 202:
      return "Accepted";
    case 204:
      return "No Content";
    case 304:
      return "Not Modified";
    case 400:
      return "Bad Request";
    case 401:
      return "Unauthorized";
    case 403:
      return "Forbidden";
    case 404:
      return "Not Found";
    case 405:
      return "Method Not Allowed";
    case 406:
      return "Not Acceptable";
    case 408:
      return "Request Timeout";
    case 409:
      return "Conflict";
    case 411:
      return "Length Required";
    case 413:
      return "Content Too Large";
    case 414:
      return "URI Too Long";
    case 415:
      return "Unsupported Media Type";
    case 417:
      return "Expectation Failed";
    case 421:
      return "Misdirected Request";
    case 422:
      return "Unprocessable Content";
    case 429:
      return "Too Many Requests";
    case 431:
      return "Request Header Fields Too Large";
    case 500:
      return "Internal Server Error";
    case 501:
      return "Not Implemented";
    case 503:
      return "Service Unavailable";
    case 505:
      return "HTTP Version Not Supported";
    case 507:
      return "Insufficient Storage";
    default:
      return "Unknown";
  }
}

}  // namespace stanchion::service
