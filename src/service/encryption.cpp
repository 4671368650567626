// The only file that knows OpenSSL.
#include <openssl/err.h>
#include <openssl/ssl.h>
#include <poll.h>
#include <sys/socket.h>
#include <unistd.h>

#include <algorithm>
#include <limits>

#include "service/channel.hpp"

namespace stanchion::service {
namespace {

using Context = std::unique_ptr<SSL_CTX, decltype(&SSL_CTX_free)>;
using Session = std::unique_ptr<SSL, decltype(&SSL_free)>;

class EncryptedChannel : public Channel {
 public:
  EncryptedChannel(int socket, Session session) : socket_(socket), session_(std::move(session)) {}
  ~EncryptedChannel() override {
    session_.reset();
    ::close(socket_);
  }
  EncryptedChannel(const EncryptedChannel&) = delete;
  EncryptedChannel& operator=(const EncryptedChannel&) = delete;

  bool shake_hands(Milliseconds wait) {
    const auto until = std::chrono::steady_clock::now() + wait;
    while (true) {
      ERR_clear_error();
      const int result = SSL_accept(session_.get());
      if (result == 1) return true;
      const auto left = std::chrono::duration_cast<Milliseconds>(until - std::chrono::steady_clock::now());
      if (left.count() <= 0 || !wait_after(result, left)) return false;
    }
  }

  std::size_t read(char* data, std::size_t bytes, Milliseconds wait) override {
    const int most = static_cast<int>(std::min<std::size_t>(bytes, std::numeric_limits<int>::max()));
    while (true) {
      ERR_clear_error();
      const int got = SSL_read(session_.get(), data, most);
      if (got > 0) return static_cast<std::size_t>(got);
      if (!wait_after(got, wait)) return 0;
    }
  }

  bool write(const char* data, std::size_t bytes, Milliseconds wait) override {
    while (bytes > 0) {
      const int most = static_cast<int>(std::min<std::size_t>(bytes, 1U << 14));
      ERR_clear_error();
      const int sent = SSL_write(session_.get(), data, most);
      if (sent > 0) {
        data += sent;
        bytes -= static_cast<std::size_t>(sent);
      } else if (!wait_after(sent, wait)) {
        return false;
      }
    }
    return true;
  }

  void finish() override {
    ERR_clear_error();
    SSL_shutdown(session_.get());
    ::shutdown(socket_, SHUT_WR);
  }
  int socket() const override { return socket_; }

 private:
  /// Waits for what the last call needs; false when it failed for good.
  bool wait_after(int result, Milliseconds wait) {
    const int need = SSL_get_error(session_.get(), result);
    if (need == SSL_ERROR_WANT_READ) return wait_for(socket_, POLLIN, wait);
    if (need == SSL_ERROR_WANT_WRITE) return wait_for(socket_, POLLOUT, wait);
    return false;
  }

  int socket_;
  Session session_;
};

class LoadedEncryption : public Encryption {
 public:
  explicit LoadedEncryption(Context context) : context_(std::move(context)) {}

  std::unique_ptr<Channel> accept(int socket, Milliseconds wait) override {
    Session session(SSL_new(context_.get()), &SSL_free);
    if (!session || SSL_set_fd(session.get(), socket) != 1) {
      ::close(socket);
      return nullptr;
    }
    auto channel = std::make_unique<EncryptedChannel>(socket, std::move(session));
    if (!channel->shake_hands(wait)) return nullptr;
    return channel;
  }

 private:
  Context context_;
};

}  // namespace

Result<std::shared_ptr<Encryption>> Encryption::load(const std::string& certificate, const std::string& key) {
  const auto refuse = [](const std::string& what, const std::string& path) {
    return Status::bad_usage("bad-certificate", what, path,
                             "give a certificate chain and its key, both as PEM, without a passphrase");
  };
  Context context(SSL_CTX_new(TLS_server_method()), &SSL_CTX_free);
  if (!context) return Status::internal("no context for encryption");
  SSL_CTX_set_min_proto_version(context.get(), TLS1_2_VERSION);
  SSL_CTX_set_options(context.get(), SSL_OP_NO_COMPRESSION | SSL_OP_NO_RENEGOTIATION);
  SSL_CTX_set_mode(context.get(), SSL_MODE_ENABLE_PARTIAL_WRITE | SSL_MODE_ACCEPT_MOVING_WRITE_BUFFER);
  // A key with a passphrase must not make the program ask for it on the terminal.
  SSL_CTX_set_default_passwd_cb(context.get(), [](char*, int, int, void*) { return 0; });
  if (SSL_CTX_use_certificate_chain_file(context.get(), certificate.c_str()) != 1) {
    return refuse("no certificate can be read from this file", certificate);
  }
  if (SSL_CTX_use_PrivateKey_file(context.get(), key.c_str(), SSL_FILETYPE_PEM) != 1) {
    return refuse("no key that belongs to the certificate can be read from this file", key);
  }
  if (SSL_CTX_check_private_key(context.get()) != 1) {
    return refuse("the key does not belong to the certificate", key);
  }
  return std::shared_ptr<Encryption>(std::make_shared<LoadedEncryption>(std::move(context)));
}

}  // namespace stanchion::service
