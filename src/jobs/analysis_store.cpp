#include "jobs/analysis_store.hpp"

#include <fcntl.h>
#include <sys/file.h>
#include <sys/stat.h>
#include <unistd.h>

#include <algorithm>
#include <cerrno>
#include <chrono>
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
constexpr std::string_view kEnding = ".order";
constexpr std::int64_t kAbandonedMs = 3'600'000;  // no order takes so long to write

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

bool is_key(const std::string& text) {
  return text.size() == kDigestBytes && std::all_of(text.begin(), text.end(), [](char c) {
           return (c >= '0' && c <= '9') || (c >= 'a' && c <= 'f');
         });
}

/// Calls `visit(key, what follows in its name, path, facts)` for every file named as `path_of` names orders.
template <class Visit>
void visit_files(const std::string& folder, const Visit& visit) {
  namespace fs = std::filesystem;
  std::error_code failure, gone;
  for (auto part = fs::directory_iterator(folder, failure); !failure && part != fs::directory_iterator();
       part.increment(failure)) {
    const std::string front = part->path().filename().string();
    if (front.size() != 2) continue;
    for (auto entry = fs::directory_iterator(part->path(), gone); !gone && entry != fs::directory_iterator();
         entry.increment(gone)) {
      const std::string name = entry->path().filename().string(), path = entry->path().string();
      const std::string key = name.substr(0, kDigestBytes);
      struct stat facts {};
      if (!is_key(key) || key.compare(0, 2, front) != 0) continue;
      if (::lstat(path.c_str(), &facts) != 0 || !S_ISREG(facts.st_mode)) continue;
      visit(key, std::string_view(name).substr(kDigestBytes), path, facts);
    }
  }
}

std::int64_t milliseconds(const timespec& time) {
  return std::int64_t{time.tv_sec} * 1000 + time.tv_nsec / 1'000'000;
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

std::vector<StoredOrder> stored_orders(const std::string& folder) {
  std::vector<StoredOrder> found;
  visit_files(folder, [&found](const std::string& key, std::string_view ending, const std::string& path,
                               const struct stat& facts) {
    if (ending == kEnding) found.push_back({key, path, facts.st_size, milliseconds(facts.st_mtim)});
  });
  std::sort(found.begin(), found.end(), [](const StoredOrder& a, const StoredOrder& b) {
    return a.used_ms != b.used_ms ? a.used_ms > b.used_ms : a.key < b.key;
  });
  return found;
}

std::int64_t trim_orders(const std::string& folder, std::int64_t most_bytes) {
  auto orders = stored_orders(folder);
  std::int64_t bytes = 0, dropped = 0;
  for (const StoredOrder& order : orders) bytes += order.bytes;
  while (bytes > most_bytes && !orders.empty()) {
    bytes -= orders.back().bytes;
    if (::unlink(orders.back().path.c_str()) == 0) ++dropped;
    orders.pop_back();
  }
  return dropped;
}

void drop_abandoned_orders(const std::string& folder) {
  const auto now = std::chrono::system_clock::now().time_since_epoch();
  const std::int64_t oldest =
      std::chrono::duration_cast<std::chrono::milliseconds>(now).count() - kAbandonedMs;
  visit_files(folder, [oldest](const std::string&, std::string_view ending, const std::string& path,
                               const struct stat& facts) {
    const bool half = ending.size() > kEnding.size() && ending.substr(0, kEnding.size()) == kEnding;
    if (half && milliseconds(facts.st_mtim) < oldest) ::unlink(path.c_str());
  });
}

}  // namespace stanchion
