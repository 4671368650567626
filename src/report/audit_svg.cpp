#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <vector>

#include "model/frequency.hpp"
#include "model/input_files.hpp"
#include "model/numbers.hpp"
#include "report/answer_svg.hpp"
#include "report/chart.hpp"

namespace stanchion {
namespace {

constexpr double kHeight = 246, kListed = 82, kCounted = 140, kHalf = 15, kAxis = 182;
constexpr const char* kCross = "M-5.5-5.5L5.5 5.5M-5.5 5.5L5.5-5.5";
constexpr const char* kDiamond = "M0-7L7 0L0 7L-7 0Z";

bool open(const AuditGap& gap) {
  return gap.counted == gap.listed;
}

/// "1 missing", "2 surplus", "3 listed, not these".
std::string words_of(const AuditGap& gap) {
  if (open(gap)) return fmt::format("{} listed, not these", grouped(gap.listed));
  if (gap.counted > gap.listed) return grouped(gap.counted - gap.listed) + " missing";
  return grouped(gap.listed - gap.counted) + " surplus";
}

class AuditChart {
 public:
  AuditChart(const Outcome& outcome, ChartWidth width, double low, double high)
      : audit_(*outcome.audit), chart_(width, kHeight, "The list beside what is counted", low, high) {}

  std::string draw(const std::string& axis) {
    chart_.text(Chart::kLeft - 16, kListed + 4, "end", "listed");
    chart_.text(Chart::kLeft - 16, kCounted + 4, "end", "counted");
    chart_.line(Chart::kLeft, kListed, chart_.width() - Chart::kRight, kListed, "s-rule");
    stretches();
    listed();
    for (const CriticalValue& value : audit_.missing)
      chart_.mark(chart_.x(shown(value.value)), kCounted, kDiamond, "c-found",
                  fmt::format("missing: {} to {}", exact(shown(value.low)), exact(shown(value.high))));
    const Offset untold = labels();
    chart_.axis(kAxis, axis, false);
    if (untold > 0) count_untold(untold);
    return chart_.done();
  }

 private:
  double shown(double value) const { return audit_.in_hertz ? hertz_of(value) : value; }
  double x_low(const AuditGap& gap) const {
    return std::isfinite(gap.low) ? chart_.x(shown(gap.low)) : Chart::kLeft;
  }
  /// A stretch is as wide as can be seen.
  double x_high(const AuditGap& gap) const { return std::max(chart_.x(shown(gap.high)), x_low(gap) + 4); }

  /// A bar where both agree, hatched where more are counted, cross-hatched where fewer are.
  void stretches() {
    double from = Chart::kLeft;
    const double end = chart_.x(shown(audit_.range.to));
    if (std::isfinite(audit_.range.from)) from = chart_.x(shown(audit_.range.from));
    const auto agree = [this](double left, double right) {
      if (right - left < 1 || !audit_.range.count) return;
      chart_.rectangle(left, kCounted - 4, right, kCounted + 4, "s-point",
                       "as many are counted as are listed");
    };
    for (const AuditGap& gap : audit_.gaps) {
      agree(from, x_low(gap));
      const char* kind = gap.counted > gap.listed ? "c-more" : "c-fewer";
      chart_.rectangle(
          x_low(gap), kCounted - kHalf, x_high(gap), kCounted + kHalf, kind,
          fmt::format("{} listed, {} counted: {}", grouped(gap.listed), grouped(gap.counted), words_of(gap)),
          gap.counted > gap.listed ? "hatch" : "mesh");
      from = x_high(gap);
    }
    agree(from, end);
    if (!audit_.range.count) chart_.text((from + end) / 2, kCounted + 4, "middle", "could not be judged");
  }

  /// A disc each; a cross in a stretch that holds fewer.
  void listed() {
    double last = -1;
    bool last_crossed = false;
    for (const double value : audit_.values) {
      const bool crossed = std::any_of(audit_.gaps.begin(), audit_.gaps.end(), [value](const AuditGap& gap) {
        return gap.counted <= gap.listed && value >= gap.low && value <= gap.high;
      });
      const double at = chart_.x(shown(value));
      if (at - last < 0.5 && crossed == last_crossed) continue;  // thousands of values, one a pixel
      last = at;
      last_crossed = crossed;
      chart_.mark(at, kListed, crossed ? kCross : Chart::kDisc, crossed ? "c-wrong" : "s-point",
                  fmt::format("listed: {:.10g}", shown(value)));
    }
  }

  /// Stretches that touch and lack alike are named together.
  std::vector<AuditGap> named() const {
    std::vector<AuditGap> together;
    for (const AuditGap& gap : audit_.gaps) {
      const auto sign = [](const AuditGap& one) {
        return (one.counted > one.listed) - (one.counted < one.listed);
      };
      if (!together.empty() && together.back().high == gap.low && sign(together.back()) == sign(gap)) {
        together.back().high = gap.high;
        together.back().listed += gap.listed;
        together.back().counted += gap.counted;
      } else {
        together.push_back(gap);
      }
    }
    return together;
  }

  /// Returns how many stretches have no name, for want of room.
  Offset labels() {
    const double foot = kListed - 12;
    const std::vector<AuditGap> gaps = named();
    if (gaps.empty() && audit_.verdict == AuditVerdict::kComplete)
      chart_.text((Chart::kLeft + chart_.width() - Chart::kRight) / 2, foot - 8, "middle",
                  fmt::format("complete: {} listed, {} counted", grouped(audit_.listed),
                              grouped(audit_.range.count.value_or(0))),
                  "c-strong");
    LabelLayout layout({Chart::kLeft - 60, 4, chart_.width() - 4, foot});
    Offset untold = 0;
    for (const AuditGap& gap : gaps) {
      const double middle = (x_low(gap) + x_high(gap)) / 2;
      if (!chart_.name(layout, middle, foot, 66, words_of(gap), kCounted - kHalf)) ++untold;
    }
    return untold;
  }

  void count_untold(Offset untold) {
    chart_.below(
        fmt::format("and {} more, for whose words there is no room: see the table", grouped(untold)));
  }

  const AuditOutcome& audit_;
  Chart chart_;
};

}  // namespace

std::string audit_svg(const Outcome& outcome, ChartWidth width) {
  if (!outcome.audit) return "";
  const AuditOutcome& audit = *outcome.audit;
  const auto shown = [&audit](double value) { return audit.in_hertz ? hertz_of(value) : value; };
  if (!std::isfinite(audit.range.to)) return "";
  double low = std::isfinite(audit.range.from) ? shown(audit.range.from) : 0;
  if (!audit.values.empty() && !std::isfinite(audit.range.from))
    low = std::min(low, shown(audit.values.front()));
  double high = std::max(shown(audit.range.to), low);
  if (high > 0 && low > 0 && low < 0.3 * high) low = 0;
  high += 0.02 * (high - low);  // the end of the range is seen
  const std::string axis = audit.in_hertz                     ? "frequency, Hz"
                           : has_matrix(outcome, "geometric") ? "load factor f"
                                                              : "eigenvalue s";
  return AuditChart(outcome, width, low, high)
      .draw(axis + "; bar: as many counted as listed; hatched: more counted; meshed: fewer, or others");
}

}  // namespace stanchion
