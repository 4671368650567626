#include "jobs/analysis_store.hpp"

#include <fcntl.h>
#include <sys/file.h>
#include <sys/stat.h>
#include <unistd.h>

#include <cerrno>
#include <cstdint>
#include <cstdio>
#include <cstring>
#include <filesystem>
#include <string_view>
#include <utility>

#include "base/digest.hpp"
#include "jobs/durable_file.hpp"

namespace stanchion {
namespace {

constexpr std::string_view kMagic = "stanchion order 1\n";
constexpr std::size_t kDigestBytes = 64;

struct Header {
  char key[kDigestBytes];
  std::int64_t vertices;
  std::int64_t dissected;
};

std::string bytes_of(const std::string& key, const KnownOrder& order) {
  Header header{};
  std::memcpy(header.key, key.data(), std::min(key.size(), kDigestBytes));
  header.vertices = order.vertex_at.size();
  header.dissected = order.dissected;
  std::string bytes(kMagic);
  bytes.append(reinterpret_cast<const char*>(&header), sizeof header);
  bytes.append(reinterpret_cast<const char*>(order.vertex_at.data()),
               static_cast<std::size_t>(order.vertex_at.size()) * sizeof(Index));
  return bytes + sha256(bytes);
}

std::optional<KnownOrder> order_of(std::string_view bytes, const std::string& key) {
  if (bytes.size() < kMagic.size() + sizeof(Header) + kDigestBytes) return std::nullopt;
  const std::string_view body = bytes.substr(0, bytes.size() - kDigestBytes);
  if (body.substr(0, kMagic.size()) != kMagic || sha256(body) != bytes.substr(body.size()))
    return std::nullopt;
  Header header{};
  std::memcpy(&header, body.data() + kMagic.size(), sizeof header);
  const std::string_view entries = body.substr(kMagic.size() + sizeof header);
  if (std::string_view(header.key, kDigestBytes) != key || header.vertices < 0 ||
      entries.size() % sizeof(Index) != 0 ||
      entries.size() / sizeof(Index) != static_cast<std::uint64_t>(header.vertices)) {
    return std::nullopt;
  }
  KnownOrder order{Buffer<Index>(header.vertices), static_cast<Index>(header.dissected)};
  if (!entries.empty()) std::memcpy(order.vertex_at.data(), entries.data(), entries.size());
  return order;
}

}  // namespace

std::string AnalysisStore::path_of(const std::string& key) const {
  return folder_ + "/" + key.substr(0, 2) + "/" + key + ".order";
}

std::optional<KnownOrder> AnalysisStore::read(const std::string& key) const {
  const std::string path = path_of(key);
  const auto bytes = read_whole(path);
  if (!bytes) return std::nullopt;
  auto order = order_of(*bytes, key);
  if (order) ::utimensat(AT_FDCWD, path.c_str(), nullptr, 0);
  return order;
}

std::optional<KnownOrder> AnalysisStore::find(const std::string& key) {
  if (auto order = read(key)) return order;
  std::error_code failure;
  std::filesystem::create_directories(folder_ + "/" + key.substr(0, 2), failure);
  const std::string path = folder_ + "/" + key.substr(0, 2) + "/.lock";
  lock_ = ::open(path.c_str(), O_RDWR | O_CREAT | O_CLOEXEC, 0666);
  if (lock_ < 0) return std::nullopt;
  if (::flock(lock_, LOCK_EX | LOCK_NB) == 0) return std::nullopt;  // nobody is at it
  while (::flock(lock_, LOCK_EX) != 0 && errno == EINTR) {
  }
  auto order = read(key);
  if (order) give_up();
  return order;
}

void AnalysisStore::keep(const std::string& key, const KnownOrder& order) {
  // A store on a full disk, or one that may not be written, costs the next run its time and nothing else.
  const Status written = write_durably(path_of(key), bytes_of(key, order));
  (void)written.ok();
  give_up();
}

void AnalysisStore::give_up() {
  if (lock_ >= 0) ::close(std::exchange(lock_, -1));
}

}  // namespace stanchion
