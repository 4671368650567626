#include "service/channel.hpp"

#include <poll.h>
#include <sys/socket.h>
#include <unistd.h>

#include <cerrno>

namespace stanchion::service {
namespace {

class PlainChannel : public Channel {
 public:
  explicit PlainChannel(int socket) : socket_(socket) {}
  ~PlainChannel() override { ::close(socket_); }
  PlainChannel(const PlainChannel&) = delete;
  PlainChannel& operator=(const PlainChannel&) = delete;

  std::size_t read(char* data, std::size_t bytes, Milliseconds wait) override {
    while (true) {
      const ssize_t got = ::recv(socket_, data, bytes, 0);
      if (got >= 0) return static_cast<std::size_t>(got);
      if (errno == EINTR) continue;
      if (errno != EAGAIN || !wait_for(socket_, POLLIN, wait)) return 0;
    }
  }

  bool write(const char* data, std::size_t bytes, Milliseconds wait) override {
    while (bytes > 0) {
      const ssize_t sent = ::send(socket_, data, bytes, MSG_NOSIGNAL);
      if (sent >= 0) {
        data += sent;
        bytes -= static_cast<std::size_t>(sent);
      } else if (errno != EINTR && (errno != EAGAIN || !wait_for(socket_, POLLOUT, wait))) {
        return false;
      }
    }
    return true;
  }

  void finish() override { ::shutdown(socket_, SHUT_WR); }
  int socket() const override { return socket_; }

 private:
  int socket_;
};

}  // namespace

bool wait_for(int socket, short events, Milliseconds wait) {
  const auto until = std::chrono::steady_clock::now() + wait;
  while (true) {
    const auto left =
        std::chrono::duration_cast<Milliseconds>(until - std::chrono::steady_clock::now()).count();
    if (left < 0) return false;
    pollfd entry{socket, events, 0};
    const int ready = ::poll(&entry, 1, static_cast<int>(left));
    if (ready > 0) return true;
    if (ready == 0) return false;
    if (errno != EINTR) return false;
  }
}

std::unique_ptr<Channel> plain_channel(int socket) {
  return std::make_unique<PlainChannel>(socket);
}

}  // namespace stanchion::service
