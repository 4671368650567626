// Changes of jobs, told to whoever listens.
#pragma once

#include <chrono>
#include <condition_variable>
#include <cstdint>
#include <deque>
#include <map>
#include <mutex>
#include <optional>
#include <string>
#include <vector>

namespace stanchion::service {

struct FeedEvent {
  std::uint64_t number = 0;
  std::string kind;  ///< "job", "removed" or "resync"
  std::string job;   ///< id
  std::string data;  ///< one line of JSON
};

/// Thread safe. Keeps the latest events; whoever falls further behind is told to read the lists again.
class EventFeed {
 public:
  explicit EventFeed(std::size_t kept = 4096) : kept_(kept) {}

  void publish(const std::string& kind, const std::string& job, const std::string& data);

  /// Number of the latest event.
  std::uint64_t latest() const;

  /// What came after event `number`, at most `most`; waits for it at most `wait`. Nothing when nothing came.
  std::vector<FeedEvent> after(std::uint64_t number, std::chrono::milliseconds wait, std::size_t most = 256);

  /// No more events: everybody who waits returns.
  void close();
  bool closed() const;

 private:
  mutable std::mutex mutex_;
  std::condition_variable changed_;
  std::deque<FeedEvent> events_;
  std::uint64_t latest_ = 0;
  std::size_t kept_;
  bool closed_ = false;
};

/// In the form of server-sent events.
std::string to_event_stream(const FeedEvent& event);

}  // namespace stanchion::service
