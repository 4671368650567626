// So many requests a second from one address, with a reserve for bursts.
#pragma once

#include <chrono>
#include <map>
#include <mutex>
#include <string>

namespace stanchion::service {

/// Thread safe. Remembers a bounded number of addresses.
class RateLimit {
 public:
  using Time = std::chrono::steady_clock::time_point;

  /// `per_second` requests go on for ever, up to `burst` at once.
  RateLimit(double per_second, double burst) : per_second_(per_second), burst_(burst) {}

  /// Whether one more is allowed; counts it if so.
  bool allow(const std::string& peer, Time now);

 private:
  struct Bucket {
    double left = 0;
    Time filled;
  };
  double per_second_, burst_;
  std::mutex mutex_;
  std::map<std::string, Bucket> buckets_;
};

}  // namespace stanchion::service
