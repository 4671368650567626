#include "service/metrics.hpp"

#include <fmt/format.h>

namespace stanchion::service {

std::string labels_to_text(const MetricsText::Labels& labels) {
  std::string text;
  for (const auto& [name, value] : labels) {
    text += (text.empty() ? "{" : ",") + name + "=\"";
    for (const char c : value) {
      if (c == '\\' || c == '"') text += '\\';
      if (c == '\n') {
        text += "\\n";
      } else {
        text += c;
      }
    }
    text += '"';
  }
  return text.empty() ? text : text + "}";
}

void RequestFigures::count(const std::string& route, int status, double seconds) {
  const std::lock_guard lock(mutex_);
  ++requests_[{route, status}];
  Times& times = times_[route];
  ++times.count;
  times.sum += seconds;
  for (std::size_t k = 0; k < kBounds.size(); ++k) {
    if (seconds <= kBounds[k]) ++times.below[k];
  }
}

std::string RequestFigures::text() const {
  const std::lock_guard lock(mutex_);
  std::string text =
      "# HELP stanchion_http_requests_total Requests answered.\n# TYPE stanchion_http_requests_total "
      "counter\n";
  for (const auto& [key, count] : requests_) {
    text += fmt::format("stanchion_http_requests_total{{route=\"{}\",status=\"{}\"}} {}\n", key.first,
                        key.second, count);
  }
  text +=
      "# HELP stanchion_http_request_seconds Time to answer a request; streams are left out.\n"
      "# TYPE stanchion_http_request_seconds histogram\n";
  for (const auto& [route, times] : times_) {
    for (std::size_t k = 0; k < kBounds.size(); ++k) {
      text += fmt::format("stanchion_http_request_seconds_bucket{{route=\"{}\",le=\"{}\"}} {}\n", route,
                          kBounds[k], times.below[k]);
    }
    text += fmt::format("stanchion_http_request_seconds_bucket{{route=\"{}\",le=\"+Inf\"}} {}\n", route,
                        times.count);
    text += fmt::format("stanchion_http_request_seconds_sum{{route=\"{}\"}} {}\n", route, times.sum);
    text += fmt::format("stanchion_http_request_seconds_count{{route=\"{}\"}} {}\n", route, times.count);
  }
  return text;
}

void MetricsText::family(const std::string& name, const std::string& help, const char* type,
                         const std::vector<Sample>& samples) {
  text_ += fmt::format("# HELP {} {}\n# TYPE {} {}\n", name, help, name, type);
  for (const Sample& sample : samples)
    text_ += fmt::format("{}{} {}\n", name, labels_to_text(sample.labels), sample.value);
}

void MetricsText::gauge(const std::string& name, const std::string& help, double value) {
  family(name, help, "gauge", {{{}, value}});
}
void MetricsText::gauges(const std::string& name, const std::string& help,
                         const std::vector<Sample>& samples) {
  family(name, help, "gauge", samples);
}
void MetricsText::counter(const std::string& name, const std::string& help, double value) {
  family(name, help, "counter", {{{}, value}});
}
void MetricsText::counters(const std::string& name, const std::string& help,
                           const std::vector<Sample>& samples) {
  family(name, help, "counter", samples);
}

}  // namespace stanchion::service
