// The only file that knows cpp-httplib, which reads bodies and writes answers; heads, limits and connections
// are ours, for it has no limits for them.
#include "service/http_server.hpp"

#include <arpa/inet.h>
#include <fcntl.h>
#include <httplib.h>
#include <netdb.h>
#include <netinet/tcp.h>
#include <poll.h>
#include <sys/eventfd.h>
#include <sys/socket.h>
#include <unistd.h>

#include <array>
#include <atomic>
#include <condition_variable>
#include <mutex>
#include <set>
#include <thread>

#include "service/request_head.hpp"

namespace stanchion::service {
namespace {

using Clock = std::chrono::steady_clock;

/// A channel with the bytes that were read ahead.
class BufferedChannel {
 public:
  explicit BufferedChannel(std::unique_ptr<Channel> channel) : channel_(std::move(channel)) {}

  Channel& channel() { return *channel_; }

  std::size_t read(char* data, std::size_t bytes, Milliseconds wait) {
    if (begin_ == end_) {
      begin_ = 0;
      end_ = channel_->read(buffer_.data(), buffer_.size(), wait);
    }
    const std::size_t taken = std::min(bytes, end_ - begin_);
    std::copy_n(buffer_.data() + begin_, taken, data);
    begin_ += taken;
    return taken;
  }

  bool has_bytes() const { return begin_ != end_; }

 private:
  std::unique_ptr<Channel> channel_;
  std::array<char, 65536> buffer_;
  std::size_t begin_ = 0, end_ = 0;
};

/// What the library reads: a head of our own making, then the body as it comes.
class MessageStream : public httplib::Stream {
 public:
  MessageStream(BufferedChannel& channel, std::string head, const HttpLimits& limits)
      : channel_(channel), head_(std::move(head)), limits_(limits), began_(Clock::now()) {}

  bool is_readable() const override { return true; }
  bool is_writable() const override {
    pollfd entry{channel_.channel().socket(), POLLIN, 0};
    if (::poll(&entry, 1, 0) < 0) return true;
    return (entry.revents & (POLLERR | POLLHUP)) == 0;
  }

  ssize_t read(char* data, size_t bytes) override {
    if (at_ < head_.size()) {
      const std::size_t taken = std::min(bytes, head_.size() - at_);
      std::copy_n(head_.data() + at_, taken, data);
      at_ += taken;
      return static_cast<ssize_t>(taken);
    }
    if (too_slow()) return -1;
    const std::size_t got = channel_.read(data, bytes, limits_.piece_wait);
    body_bytes_ += got;
    return got == 0 ? -1 : static_cast<ssize_t>(got);
  }

  ssize_t write(const char* data, size_t bytes) override {
    for (size_t begin = 0; begin < bytes && !failed_; begin += kPiece)
      failed_ = !write_piece(data + begin, std::min(kPiece, bytes - begin));
    return failed_ ? -1 : static_cast<ssize_t>(bytes);
  }

  void get_remote_ip_and_port(std::string& ip, int& port) const override {
    ip.clear();
    port = 0;
  }
  void get_local_ip_and_port(std::string& ip, int& port) const override {
    ip.clear();
    port = 0;
  }
  socket_t socket() const override { return channel_.channel().socket(); }

  std::uint64_t body_bytes() const { return body_bytes_; }
  bool failed() const { return failed_; }

 private:
  static constexpr std::size_t kPiece = 65536;

  /// Only the time counts in which the other end did not take what was there: a stream may be silent.
  bool write_piece(const char* data, std::size_t bytes) {
    const auto begun = Clock::now();
    if (!channel_.channel().write(data, bytes, limits_.piece_wait)) return false;
    write_time_ += Clock::now() - begun;
    sent_bytes_ += bytes;
    return !is_slow(write_time_, sent_bytes_);
  }

  bool too_slow() const { return is_slow(Clock::now() - began_, body_bytes_); }

  bool is_slow(Clock::duration taken, std::uint64_t bytes) const {
    const auto late = std::chrono::duration_cast<std::chrono::seconds>(taken - limits_.body_grace).count();
    return late > 0 && bytes < static_cast<std::uint64_t>(late) * limits_.body_bytes_per_second;
  }

  BufferedChannel& channel_;
  std::string head_;
  std::size_t at_ = 0;
  const HttpLimits& limits_;
  Clock::time_point began_;
  Clock::duration write_time_{};
  std::uint64_t body_bytes_ = 0, sent_bytes_ = 0;
  bool failed_ = false;
};

void give_file(const HttpResponse& response, httplib::Response& out) {
  const int file = response.file;
  out.set_content_provider(
      response.file_bytes, response.content_type,
      [file](size_t offset, size_t length, httplib::DataSink& sink) {
        std::array<char, 65536> piece;
        const ssize_t got =
            ::pread(file, piece.data(), std::min(length, piece.size()), static_cast<off_t>(offset));
        return got > 0 && sink.write(piece.data(), static_cast<size_t>(got));
      },
      [file](bool) { ::close(file); });
}

void give_stream(HttpResponse& response, httplib::Response& out) {
  out.set_chunked_content_provider(
      response.content_type, [stream = std::move(response.stream)](size_t, httplib::DataSink& sink) {
        stream([&sink](std::string_view bytes) { return sink.write(bytes.data(), bytes.size()); });
        sink.done();
        return true;
      });
}

void give(HttpResponse response, httplib::Response& out) {
  out.status = response.status;
  for (const auto& [name, value] : response.fields) out.set_header(name, value);
  if (response.stream) {
    give_stream(response, out);
  } else if (response.file >= 0) {
    // The library makes no provider for nothing.
    if (response.file_bytes == 0) {
      ::close(response.file);
      out.set_content("", response.content_type);
    } else {
      give_file(response, out);
    }
  } else if (!response.content_type.empty()) {
    out.set_content(response.body, response.content_type);
  }
}

int open_listener(const addrinfo& where, int& error) {
  const int socket =
      ::socket(where.ai_family, where.ai_socktype | SOCK_CLOEXEC | SOCK_NONBLOCK, where.ai_protocol);
  if (socket < 0) {
    error = errno;
    return -1;
  }
  const int yes = 1;
  ::setsockopt(socket, SOL_SOCKET, SO_REUSEADDR, &yes, sizeof yes);
  if (where.ai_family == AF_INET6) ::setsockopt(socket, IPPROTO_IPV6, IPV6_V6ONLY, &yes, sizeof yes);
  if (::bind(socket, where.ai_addr, where.ai_addrlen) == 0 && ::listen(socket, 511) == 0) return socket;
  error = errno;
  ::close(socket);
  return -1;
}

int port_of(int socket) {
  sockaddr_storage name{};
  socklen_t bytes = sizeof name;
  ::getsockname(socket, reinterpret_cast<sockaddr*>(&name), &bytes);
  if (name.ss_family == AF_INET6) return ntohs(reinterpret_cast<const sockaddr_in6*>(&name)->sin6_port);
  return ntohs(reinterpret_cast<const sockaddr_in*>(&name)->sin_port);
}

std::string address_of(const sockaddr_storage& name, socklen_t bytes) {
  std::array<char, NI_MAXHOST> host{};
  ::getnameinfo(reinterpret_cast<const sockaddr*>(&name), bytes, host.data(), host.size(), nullptr, 0,
                NI_NUMERICHOST);
  return host.data();
}

}  // namespace

struct HttpServer::Parts : public httplib::Server {
  HttpHandler handler;
  HttpRefusal refusal;
  HttpLimits limits;
  std::shared_ptr<Encryption> encryption;
  int listener = -1, wake = -1;
  std::thread acceptor;
  std::atomic<bool> stopping{false};

  mutable std::mutex mutex;
  std::condition_variable all_closed;
  std::set<int> idle;  ///< sockets that wait for a request
  std::uint64_t open = 0, accepted = 0, turned_away = 0;

  /// The request that this thread is answering; the library hands on its own idea of it only.
  static thread_local const HttpRequest* current;

  void prepare();
  void forget_listener() { svr_sock_ = INVALID_SOCKET; }
  void answer(httplib::Response& out, const httplib::ContentReader* reader);
  void accept_all();
  void take(int socket, const std::string& peer);
  void serve(int socket, const std::string& peer);
  bool serve_one(BufferedChannel& channel, const std::string& peer, bool last);
  std::string read_head_bytes(BufferedChannel& channel, HeadRefusal& refused);
  bool refuse(BufferedChannel& channel, const HeadRefusal& why);
  void mark_idle(int socket, bool is_idle);
};

thread_local const HttpRequest* HttpServer::Parts::current = nullptr;

/// Whatever the request, the library sees the path "/"; where a request goes is decided by the handler.
void HttpServer::Parts::prepare() {
  const auto without_body = [this](const httplib::Request&, httplib::Response& out) { answer(out, nullptr); };
  const auto with_body = [this](const httplib::Request&, httplib::Response& out,
                                const httplib::ContentReader& reader) { answer(out, &reader); };
  Get("/", without_body);
  Post("/", with_body);
  Put("/", with_body);
  Delete("/", with_body);
  set_keep_alive_timeout(std::chrono::duration_cast<std::chrono::seconds>(limits.idle_wait).count());
  set_keep_alive_max_count(static_cast<size_t>(limits.requests_per_connection));
  set_error_handler(HandlerWithResponse([this](const httplib::Request&, httplib::Response& out) {
    if (!out.body.empty() || out.has_header("Content-Type")) return httplib::Server::HandlerResponse::Handled;
    if (out.status < 400) return httplib::Server::HandlerResponse::Unhandled;
    give(refusal(out.status, "bad-request", "the request cannot be answered"), out);
    return httplib::Server::HandlerResponse::Handled;
  }));
  svr_sock_ = listener;  // the library writes streams only while it believes that it listens
}

void HttpServer::Parts::answer(httplib::Response& out, const httplib::ContentReader* reader) {
  HttpRequest request = *current;
  request.read_body = [reader](const Sink& sink) {
    if (reader == nullptr) return true;
    return (*reader)([&sink](const char* data, size_t bytes) { return sink({data, bytes}); });
  };
  HttpResponse response;
  try {
    response = handler(request);
  } catch (const std::exception&) {
    response = refusal(500, "internal", "a defect of the program met this request");
  }
  give(std::move(response), out);
}

void HttpServer::Parts::mark_idle(int socket, bool is_idle) {
  const std::lock_guard lock(mutex);
  if (is_idle) {
    idle.insert(socket);
  } else {
    idle.erase(socket);
  }
}

/// Everything up to the empty line; empty when the connection ended.
std::string HttpServer::Parts::read_head_bytes(BufferedChannel& channel, HeadRefusal& refused) {
  const HeadLimits head_limits;
  std::string head;
  auto until = Clock::now() + limits.idle_wait;
  while (true) {
    const auto left = std::chrono::duration_cast<Milliseconds>(until - Clock::now());
    char byte = 0;
    if (left.count() <= 0 || channel.read(&byte, 1, left) == 0) {
      if (!head.empty()) refused = {408, "request-timeout", "the head of the request did not arrive in time"};
      return {};
    }
    if (head.empty()) {
      if (byte == '\r' || byte == '\n') continue;  // left behind by the request before
      until = Clock::now() + limits.head_wait;
    }
    head += byte;
    if (head.size() > head_limits.bytes) {
      refused = {431, "head-too-long", "the head of the request is longer than 16 KiB"};
      return {};
    }
    if (byte == '\n' && head.size() >= 4 && head.compare(head.size() - 4, 4, "\r\n\r\n") == 0) return head;
  }
}

bool HttpServer::Parts::refuse(BufferedChannel& channel, const HeadRefusal& why) {
  const HttpResponse response = refusal(why.status, why.code, why.detail);
  std::string text = "HTTP/1.1 " + std::to_string(response.status) + " " + reason_phrase(response.status) +
                     "\r\nConnection: close\r\nContent-Type: " + response.content_type +
                     "\r\nContent-Length: " + std::to_string(response.body.size()) + "\r\n";
  for (const auto& [name, value] : response.fields) text += name + ": " + value + "\r\n";
  text += "\r\n" + response.body;
  channel.channel().write(text.data(), text.size(), limits.piece_wait);
  return false;
}

bool HttpServer::Parts::serve_one(BufferedChannel& channel, const std::string& peer, bool last) {
  HeadRefusal refused;
  mark_idle(channel.channel().socket(), true);
  const std::string bytes = stopping ? "" : read_head_bytes(channel, refused);
  mark_idle(channel.channel().socket(), false);
  RequestHead head;
  if (refused.status == 0 && bytes.empty()) return false;
  if (refused.status == 0) refused = read_head(bytes, head);
  if (refused.status != 0) return refuse(channel, refused);

  std::string ours = head.method + " / HTTP/1.1\r\nHost: -\r\n";
  if (head.chunked) ours += "Transfer-Encoding: chunked\r\n";
  if (head.content_length) ours += "Content-Length: " + std::to_string(*head.content_length) + "\r\n";
  if (head.expects_continue && head.has_body()) ours += "Expect: 100-continue\r\n";
  ours += "\r\n";
  MessageStream stream(channel, ours, limits);
  const HttpRequest request{head, peer, encryption != nullptr, {}};
  current = &request;
  // After chunks that were refused nobody knows where the next request begins.
  bool closed = last || !head.keep_alive || head.chunked || stopping;
  const bool close = closed;
  bool ignored = false;
  const bool written = process_request(stream, close, ignored, nullptr);
  current = nullptr;
  if (!head.chunked && stream.body_bytes() != head.content_length.value_or(0)) closed = true;
  return written && !stream.failed() && !closed;
}

void HttpServer::Parts::serve(int socket, const std::string& peer) {
  const int yes = 1;
  ::setsockopt(socket, IPPROTO_TCP, TCP_NODELAY, &yes, sizeof yes);
  auto channel = encryption ? encryption->accept(socket, limits.head_wait) : plain_channel(socket);
  if (!channel) return;
  auto buffered = std::make_unique<BufferedChannel>(std::move(channel));
  int served = 0;
  while (serve_one(*buffered, peer, ++served >= limits.requests_per_connection)) {
  }
  // What the other end still sends is taken for a moment, so that it does not lose the answer.
  buffered->channel().finish();
  const auto until = Clock::now() + std::chrono::seconds(1);
  std::array<char, 4096> rest;
  for (int piece = 0; piece < 256 && Clock::now() < until && !stopping; ++piece) {
    if (buffered->read(rest.data(), rest.size(), Milliseconds(200)) == 0) break;
  }
}

void HttpServer::Parts::take(int socket, const std::string& peer) {
  {
    const std::lock_guard lock(mutex);
    ++accepted;
    if (open >= static_cast<std::uint64_t>(limits.connections)) {
      ++turned_away;
      if (!encryption) {
        const HttpResponse response = refusal(503, "too-many-connections", "all connections are taken");
        const std::string text =
            "HTTP/1.1 503 Service Unavailable\r\nConnection: close\r\nRetry-After: 1\r\nContent-Type: " +
            response.content_type + "\r\nContent-Length: " + std::to_string(response.body.size()) +
            "\r\n\r\n" + response.body;
        [[maybe_unused]] const ssize_t sent =
            ::send(socket, text.data(), text.size(), MSG_NOSIGNAL | MSG_DONTWAIT);
      }
      ::close(socket);
      return;
    }
    ++open;
  }
  const auto leave = [this] {
    const std::lock_guard lock(mutex);
    --open;
    all_closed.notify_all();
  };
  try {
    std::thread([this, socket, peer, leave] {
      try {
        serve(socket, peer);
      } catch (const std::exception&) {
        // One connection is lost, for want of memory; the others go on.
      }
      leave();
    }).detach();
  } catch (const std::system_error&) {
    ::close(socket);
    leave();
  }
}

void HttpServer::Parts::accept_all() {
  while (!stopping) {
    std::array<pollfd, 2> entries{pollfd{listener, POLLIN, 0}, pollfd{wake, POLLIN, 0}};
    if (::poll(entries.data(), entries.size(), -1) < 0 && errno != EINTR) break;
    if (stopping) break;
    sockaddr_storage name{};
    socklen_t bytes = sizeof name;
    const int socket =
        ::accept4(listener, reinterpret_cast<sockaddr*>(&name), &bytes, SOCK_CLOEXEC | SOCK_NONBLOCK);
    if (socket >= 0) {
      take(socket, address_of(name, bytes));
    } else if (errno == EMFILE || errno == ENFILE || errno == ENOBUFS || errno == ENOMEM) {
      std::this_thread::sleep_for(Milliseconds(20));  // until a connection ends
    }
  }
}

HttpServer::HttpServer(HttpHandler handler, HttpRefusal refusal, HttpLimits limits)
    : parts_(std::make_unique<Parts>()) {
  parts_->handler = std::move(handler);
  parts_->refusal = std::move(refusal);
  parts_->limits = limits;
}

HttpServer::~HttpServer() {
  stop();
}

Result<int> HttpServer::start(const HttpAddress& address, std::shared_ptr<Encryption> encryption) {
  addrinfo hints{};
  hints.ai_socktype = SOCK_STREAM;
  hints.ai_flags = AI_PASSIVE | AI_NUMERICSERV;
  addrinfo* found = nullptr;
  const std::string port = std::to_string(address.port);
  if (const int failure = ::getaddrinfo(address.host.c_str(), port.c_str(), &hints, &found); failure != 0) {
    return Status::bad_usage("cannot-listen", std::string("this is no address: ") + ::gai_strerror(failure),
                             address.host, "give an address of this machine, such as 127.0.0.1");
  }
  int error = 0;
  for (const addrinfo* entry = found; entry != nullptr && parts_->listener < 0; entry = entry->ai_next) {
    parts_->listener = open_listener(*entry, error);
  }
  ::freeaddrinfo(found);
  if (parts_->listener < 0) {
    return Status::resource_limit("cannot-listen", std::generic_category().message(error),
                                  address.host + ":" + port, "choose another --port, or 0 for any free one");
  }
  parts_->encryption = std::move(encryption);
  parts_->wake = ::eventfd(0, EFD_CLOEXEC | EFD_NONBLOCK);
  parts_->prepare();
  parts_->acceptor = std::thread([this] { parts_->accept_all(); });
  return port_of(parts_->listener);
}

void HttpServer::stop() {
  if (!parts_->acceptor.joinable()) return;
  parts_->stopping = true;
  const std::uint64_t one = 1;
  [[maybe_unused]] const ssize_t written = ::write(parts_->wake, &one, sizeof one);
  parts_->acceptor.join();
  ::close(parts_->listener);
  parts_->listener = -1;
  std::unique_lock lock(parts_->mutex);
  for (const int socket : parts_->idle) ::shutdown(socket, SHUT_RD);
  parts_->all_closed.wait(lock, [this] { return parts_->open == 0; });
  lock.unlock();
  parts_->forget_listener();
  ::close(parts_->wake);
}

HttpFigures HttpServer::figures() const {
  const std::lock_guard lock(parts_->mutex);
  return {parts_->accepted, parts_->turned_away, parts_->open};
}

bool is_loopback(const std::string& host) {
  in_addr four{};
  in6_addr six{};
  if (::inet_pton(AF_INET, host.c_str(), &four) == 1) return (ntohl(four.s_addr) >> 24) == 127;
  return host == "localhost" ||
         (::inet_pton(AF_INET6, host.c_str(), &six) == 1 && IN6_IS_ADDR_LOOPBACK(&six));
}

}  // namespace stanchion::service
