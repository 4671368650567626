// Figures for monitoring, in the Prometheus text format.
#pragma once

#include <array>
#include <cstdint>
#include <map>
#include <mutex>
#include <string>
#include <utility>
#include <vector>

namespace stanchion::service {

/// Counts and times of requests. Thread safe.
class RequestFigures {
 public:
  static constexpr std::array<double, 12> kBounds = {0.001, 0.0025, 0.005, 0.01, 0.025, 0.05,
                                                     0.1,   0.25,   0.5,   1,    2.5,   10};

  void count(const std::string& route, int status, double seconds);

  /// The families stanchion_http_requests_total and stanchion_http_request_seconds.
  std::string text() const;

 private:
  struct Times {
    std::array<std::uint64_t, kBounds.size()> below{};
    std::uint64_t count = 0;
    double sum = 0;
  };
  mutable std::mutex mutex_;
  std::map<std::pair<std::string, int>, std::uint64_t> requests_;
  std::map<std::string, Times> times_;
};

/// Writes one family after the other.
class MetricsText {
 public:
  using Labels = std::vector<std::pair<std::string, std::string>>;
  struct Sample {
    Labels labels;
    double value;
  };

  void gauge(const std::string& name, const std::string& help, double value);
  void gauges(const std::string& name, const std::string& help, const std::vector<Sample>& samples);
  void counter(const std::string& name, const std::string& help, double value);
  void counters(const std::string& name, const std::string& help, const std::vector<Sample>& samples);
  void append(const std::string& text) { text_ += text; }

  const std::string& text() const { return text_; }

 private:
  void family(const std::string& name, const std::string& help, const char* type,
              const std::vector<Sample>& samples);
  std::string text_;
};

/// {a="b"} with what has to be escaped escaped; empty for none.
std::string labels_to_text(const MetricsText::Labels& labels);

}  // namespace stanchion::service
