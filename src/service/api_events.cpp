// Changes of jobs as server-sent events.
#include <algorithm>
#include <charconv>

#include "service/api.hpp"
#include "service/problem.hpp"

namespace stanchion::service {
namespace {

constexpr std::chrono::milliseconds kLook{1'000};  // how soon the end of the service is noticed

bool is_ended_text(const std::string& data) {
  const auto json = nlohmann::json::parse(data, nullptr, false);
  const auto state = json.is_object() ? job_state_of(json.value("state", "")) : std::nullopt;
  return state && is_ended(*state);
}

}  // namespace

HttpResponse Api::all_events(const Call& call) {
  return events(call, "");
}

HttpResponse Api::job_events(const Call& call) {
  HttpResponse refusal;
  if (!find_job(call.id, refusal)) return refusal;
  return events(call, call.id);
}

HttpResponse Api::events(const Call& call, const std::string& job) {
  std::uint64_t number = parts_.feed.latest();
  if (const std::string& last = call.request.head.field("last-event-id"); !last.empty()) {
    const auto parsed = std::from_chars(last.data(), last.data() + last.size(), number);
    if (parsed.ec != std::errc{} || parsed.ptr != last.data() + last.size()) {
      return problem_response(400, "bad-request", "Last-Event-ID is no number", "", "Last-Event-ID");
    }
  }
  HttpResponse response;
  response.content_type = "text/event-stream";
  response.fields = {{"Cache-Control", "no-store"}, {"X-Accel-Buffering", "no"}};
  response.stream = [this, number, job](const Sink& sink) mutable {
    // One job's stream begins with how it is now, and so ends at once when it has ended.
    if (!job.empty()) {
      HttpResponse refusal;
      const auto record = find_job(job, refusal);
      if (!record) return;
      const auto json = job_to_json(*record, parts_.runner.progress_of(record->number), false);
      if (!sink(to_event_stream({number, "job", job, json.dump()})) || is_ended(record->state)) return;
    } else if (!sink(": begin\n\n")) {
      return;
    }
    const auto heartbeat = parts_.options.heartbeat;
    auto spoken = std::chrono::steady_clock::now();
    while (!closing_ && !parts_.feed.closed()) {
      const auto news = parts_.feed.after(number, std::min(kLook, heartbeat));
      std::string text;
      bool over = false;
      for (const FeedEvent& event : news) {
        number = event.number;
        if (!job.empty() && event.job != job && event.kind != "resync") continue;
        text += to_event_stream(event);
        over = !job.empty() && (event.kind == "removed" || is_ended_text(event.data));
        if (over) break;
      }
      const auto now = std::chrono::steady_clock::now();
      if (text.empty() && now - spoken >= heartbeat) text = ": still here\n\n";
      if (text.empty()) continue;
      spoken = now;
      if (!sink(text) || over) return;
    }
  };
  return response;
}

}  // namespace stanchion::service
