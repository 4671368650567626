#include "service/event_feed.hpp"

#include <algorithm>

namespace stanchion::service {

void EventFeed::publish(const std::string& kind, const std::string& job, const std::string& data) {
  {
    const std::lock_guard lock(mutex_);
    events_.push_back({++latest_, kind, job, data});
    if (events_.size() > kept_) events_.pop_front();
  }
  changed_.notify_all();
}

std::uint64_t EventFeed::latest() const {
  const std::lock_guard lock(mutex_);
  return latest_;
}

std::vector<FeedEvent> EventFeed::after(std::uint64_t number, std::chrono::milliseconds wait,
                                        std::size_t most) {
  std::unique_lock lock(mutex_);
  if (number > latest_) return {{latest_, "resync", "", "{}"}};  // from a server that ended
  changed_.wait_for(lock, wait, [&] { return closed_ || latest_ > number; });
  if (latest_ == number) return {};
  if (number + events_.size() < latest_) return {{latest_, "resync", "", "{}"}};
  const auto first = events_.end() - static_cast<std::ptrdiff_t>(latest_ - number);
  const auto count = std::min<std::size_t>(most, static_cast<std::size_t>(events_.end() - first));
  return {first, first + static_cast<std::ptrdiff_t>(count)};
}

void EventFeed::close() {
  {
    const std::lock_guard lock(mutex_);
    closed_ = true;
  }
  changed_.notify_all();
}

bool EventFeed::closed() const {
  const std::lock_guard lock(mutex_);
  return closed_;
}

std::string to_event_stream(const FeedEvent& event) {
  return "id: " + std::to_string(event.number) + "\nevent: " + event.kind + "\ndata: " + event.data + "\n\n";
}

}  // namespace stanchion::service
