// One connection as a stream of bytes with time limits, plain or encrypted.
#pragma once

#include <sys/types.h>

#include <chrono>
#include <cstddef>
#include <memory>
#include <string>

#include "stanchion/status.hpp"

namespace stanchion::service {

using Milliseconds = std::chrono::milliseconds;

/// Not thread safe, but `shut()` may be called from any thread while the others wait.
class Channel {
 public:
  virtual ~Channel() = default;

  /// Bytes read; 0 at the end, on failure and when nothing came in time.
  virtual std::size_t read(char* data, std::size_t bytes, Milliseconds wait) = 0;

  /// Whether all was written; every `wait` some of it has to go out.
  virtual bool write(const char* data, std::size_t bytes, Milliseconds wait) = 0;

  /// Says to the other end that nothing more comes.
  virtual void finish() = 0;

  virtual int socket() const = 0;
};

/// Takes over the non-blocking `socket` and closes it in the end.
std::unique_ptr<Channel> plain_channel(int socket);

/// Waits until the socket is ready (POLLIN, POLLOUT); false when it is not in time.
bool wait_for(int socket, short events, Milliseconds wait);

/// A certificate with its key, for all connections. Thread safe.
class Encryption {
 public:
  /// Bad usage "bad-certificate" when a file cannot be read or key and certificate do not belong together.
  static Result<std::shared_ptr<Encryption>> load(const std::string& certificate, const std::string& key);
  virtual ~Encryption() = default;

  /// Takes over the socket, shakes hands; null when that fails.
  virtual std::unique_ptr<Channel> accept(int socket, Milliseconds wait) = 0;
};

}  // namespace stanchion::service
