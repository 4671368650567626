#include "report/staircase_svg.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <vector>

#include "model/numbers.hpp"
#include "report/chart.hpp"
#include "report/markup.hpp"
#include "report/staircase_points.hpp"

namespace stanchion {
namespace {

constexpr double kHeight = 380, kLeft = 70, kRight = 24, kTop = 28, kBottom = 62;

class StaircasePicture {
 public:
  StaircasePicture(const std::vector<StaircasePoint>& points, bool logarithmic, ChartWidth width)
      : points_(points), logarithmic_(logarithmic), narrow_(width == ChartWidth::kNarrow) {
    low_ = place(points.front().shift);
    high_ = place(points.back().shift);
    if (!(high_ > low_)) {
      low_ -= 0.5;
      high_ += 0.5;
    }
    for (const StaircasePoint& point : points) most_ = std::max(most_, point.count);
  }

  std::string draw(const std::string& meaning, const std::string& axis) {
    count_axis();
    shift_axis(axis);
    steps();
    return head(meaning) + svg_ + "</svg>\n";
  }

 private:
  std::string head(const std::string& meaning) const {
    std::string svg = fmt::format(
        "<svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 {0:g} {1:g}\" width=\"{0:g}\" "
        "height=\"{1:g}\" "
        "role=\"img\" aria-label=\"{2}\" style=\"max-width:100%;height:auto;font:13px "
        "sans-serif\">\n<title>{2}</title>\n",
        width_, height_, escaped("Staircase: " + meaning));
    svg += fmt::format("<rect class=\"s-ground\" width=\"{:g}\" height=\"{:g}\" fill=\"#ffffff\"/>\n", width_,
                       height_);
    svg += fmt::format(
        "<defs><pattern id=\"{}\" width=\"6\" height=\"6\" patternUnits=\"userSpaceOnUse\" "
        "patternTransform=\"rotate(45)\"><line x1=\"0\" y1=\"0\" x2=\"0\" y2=\"6\" class=\"s-jump\" "
        "stroke=\"#8a5a00\" "
        "stroke-width=\"2\"/></pattern></defs>\n",
        pattern());
    return svg;
  }
  const char* pattern() const { return narrow_ ? "open-narrow" : "open"; }
  double place(double shift) const {
    return logarithmic_ ? std::copysign(std::log10(std::fabs(shift)), shift < 0 ? -1 : 1) : shift;
  }
  double x(double shift) const { return at(place(shift)); }
  double at(double place) const {
    return kLeft + (place - low_) / (high_ - low_) * (width_ - kLeft - kRight);
  }
  double y(double count) const {
    return kHeight - kBottom - count / std::max<double>(most_, 1) * (kHeight - kTop - kBottom);
  }

  void line(double x1, double y1, double x2, double y2, const char* look) {
    svg_ += fmt::format("<line x1=\"{:.2f}\" y1=\"{:.2f}\" x2=\"{:.2f}\" y2=\"{:.2f}\" {}/>\n", x1, y1, x2,
                        y2, look);
  }
  void text(double where_x, double where_y, const char* anchor, const std::string& words) {
    svg_ += fmt::format("<text x=\"{:.2f}\" y=\"{:.2f}\" text-anchor=\"{}\" fill=\"#222222\">{}</text>\n",
                        where_x, where_y, anchor, escaped(words));
  }

  void count_axis() {
    const auto step = static_cast<Index>(std::max(1.0, tick_step(std::max<double>(most_, 1), 6)));
    for (Index count = 0; count <= most_; count += step) {
      line(kLeft, y(count), width_ - kRight, y(count), "class=\"s-rule\" stroke=\"#e2e2e2\"");
      text(kLeft - 8, y(count) + 4, "end", grouped(count));
    }
    text(kLeft - 8, kTop - 14, "end", "count");
  }

  void shift_axis(const std::string& axis) {
    line(kLeft, y(0), width_ - kRight, y(0), "class=\"s-axis\" stroke=\"#222222\"");
    if (logarithmic_) {
      const int parts = narrow_ ? 3 : 4;
      for (int k = 0; k <= parts; ++k) {
        const double where = low_ + (high_ - low_) * k / parts;
        tick(at(where), fmt::format("{:.4g}", points_.front().shift < 0 ? -std::pow(10.0, -where)
                                                                        : std::pow(10.0, where)));
      }
    } else {
      const double step = tick_step(high_ - low_, narrow_ ? 4 : 6);
      for (double where = std::ceil(low_ / step) * step; where <= high_ + step * 1e-9; where += step) {
        tick(at(where), fmt::format("{:.6g}", std::fabs(where) < step * 1e-9 ? 0.0 : where));
      }
    }
    double line_y = kHeight - 14;
    for (const std::string& words : wrapped(axis, width_ - 16, 13)) {
      text(narrow_ ? width_ / 2 : (kLeft + width_ - kRight) / 2, line_y, "middle", words);
      line_y += 17;
    }
    height_ = line_y - 3;
  }

  void tick(double where, const std::string& words) {
    line(where, y(0), where, y(0) + 5, "class=\"s-axis\" stroke=\"#222222\"");
    text(where, y(0) + 20, "middle", words);
  }

  void steps() {
    for (std::size_t i = 1; i < points_.size(); ++i) {
      const StaircasePoint &a = points_[i - 1], &b = points_[i];
      if (a.count == b.count) {
        line(x(a.shift), y(a.count), x(b.shift), y(b.count),
             "class=\"s-step\" stroke=\"#0b5394\" stroke-width=\"2.5\"");
        continue;
      }
      const double left = x(a.shift), right = std::max(x(b.shift), left + 1.5);
      const double top = y(std::max(a.count, b.count)), bottom = y(std::min(a.count, b.count));
      svg_ += fmt::format(
          "<rect x=\"{:.2f}\" y=\"{:.2f}\" width=\"{:.2f}\" height=\"{:.2f}\" fill=\"url(#{})\" "
          "class=\"s-jump\" stroke=\"#8a5a00\">"
          "<title>{}</title></rect>\n",
          left, top, right - left, bottom - top, pattern(),
          escaped(fmt::format("{} between {} and {}", b.count - a.count, exact(a.shift), exact(b.shift))));
    }
    for (const StaircasePoint& point : points_) {
      svg_ += fmt::format(
          "<circle class=\"s-point\" cx=\"{:.2f}\" cy=\"{:.2f}\" r=\"3\" "
          "fill=\"#0b5394\"><title>{}</title></circle>\n",
          x(point.shift), y(point.count), escaped(fmt::format("{} at {}", point.count, exact(point.shift))));
    }
  }

  const std::vector<StaircasePoint>& points_;
  bool logarithmic_, narrow_;
  double width_ = narrow_ ? 380 : 760;
  double low_ = 0, high_ = 1;
  Index most_ = 0;
  double height_ = kHeight;  ///< with all lines of the axis
  std::string svg_;
};

/// "factor f", "shift s".
std::string axis_of(const std::string& meaning) {
  const bool factors =
      meaning.find("factor") != std::string::npos || meaning.find("f G") != std::string::npos;
  return factors ? "load factor f" : "shift s";
}

/// Both sides of zero have sentences of their own; the picture needs one.
std::string meaning_of(const std::vector<ShiftCount>& counts) {
  const std::string& first = counts.front().meaning;
  if (first.rfind("critical factors", 0) == 0) return "critical factors between 0 and the shift";
  return first;
}

}  // namespace

std::string staircase_svg(const Outcome& outcome, bool logarithmic, ChartWidth width) {
  if (!outcome.count) return {};
  const std::vector<StaircasePoint> points = known_points(outcome.count->counts);
  if (points.empty()) return {};
  const bool one_sign = points.front().shift > 0 || points.back().shift < 0;
  const std::string meaning = meaning_of(outcome.count->counts);
  return StaircasePicture(points, logarithmic && one_sign, width)
      .draw(meaning, axis_of(meaning) + ": " + meaning + "; hatched: it jumps in there");
}

}  // namespace stanchion
