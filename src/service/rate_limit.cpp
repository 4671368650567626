#include "service/rate_limit.hpp"

#include <algorithm>

namespace stanchion::service {
namespace {

constexpr std::size_t kMostPeers = 4096;

}  // namespace

bool RateLimit::allow(const std::string& peer, Time now) {
  const std::lock_guard lock(mutex_);
  const auto refilled = [&](const Bucket& bucket) {
    return std::min(burst_,
                    bucket.left + per_second_ * std::chrono::duration<double>(now - bucket.filled).count());
  };
  if (buckets_.size() >= kMostPeers && buckets_.count(peer) == 0) {
    // Whoever has its whole reserve again need not be remembered.
    for (auto entry = buckets_.begin(); entry != buckets_.end();) {
      entry = refilled(entry->second) >= burst_ ? buckets_.erase(entry) : std::next(entry);
    }
    if (buckets_.size() >= kMostPeers) return false;
  }
  const auto [place, is_new] = buckets_.try_emplace(peer, Bucket{burst_, now});
  Bucket& bucket = place->second;
  bucket.left = refilled(bucket);
  bucket.filled = now;
  if (bucket.left < 1) return false;
  bucket.left -= 1;
  return true;
}

}  // namespace stanchion::service
