#include "report/chart.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "report/markup.hpp"

namespace stanchion {

double tick_step(double range, int many) {
  const double raw = range / many, power = std::pow(10.0, std::floor(std::log10(raw)));
  const double part = raw / power;
  return power * (part <= 1 ? 1 : part <= 2 ? 2 : part <= 5 ? 5 : 10);
}

Chart::Chart(ChartWidth width, double height, const std::string& title, double low, double high)
    : kind_(width),
      width_(width == ChartWidth::kWide ? 760 : 380),
      bottom_(height),
      low_(low),
      high_(high),
      title_(title) {
  if (!(high_ > low_)) {
    low_ -= 0.5;
    high_ += 0.5;
  }
}

std::string Chart::pattern(const char* name) const {
  return std::string(name) + (kind_ == ChartWidth::kWide ? "" : "-narrow");
}

double Chart::x(double value) const {
  return kLeft + (std::clamp(value, low_, high_) - low_) / (high_ - low_) * (width_ - kLeft - kRight);
}

void Chart::line(double x1, double y1, double x2, double y2, const char* kind) {
  svg_ += fmt::format("<path class=\"{}\" d=\"M{:.1f} {:.1f}L{:.1f} {:.1f}\"/>\n", kind, x1, y1, x2, y2);
}

void Chart::rectangle(double left, double top, double right, double bottom, const char* kind,
                      const std::string& title, const char* pattern) {
  svg_ += fmt::format(
      "<rect class=\"{}\" x=\"{:.1f}\" y=\"{:.1f}\" width=\"{:.1f}\" "
      "height=\"{:.1f}\"{}><title>{}</title></rect>\n",
      kind, left, top, right - left, bottom - top,
      pattern == nullptr ? "" : fmt::format(" fill=\"url(#{})\"", this->pattern(pattern)), escaped(title));
}

void Chart::mark(double at_x, double at_y, const char* shape, const char* kind, const std::string& title) {
  svg_ += fmt::format(
      "<path class=\"{}\" transform=\"translate({:.1f} {:.1f})\" d=\"{}\"><title>{}</title></path>\n", kind,
      at_x, at_y, shape, escaped(title));
}

void Chart::text(double at_x, double at_y, const char* anchor, std::string_view words, const char* kind) {
  svg_ += fmt::format("<text class=\"{}\" x=\"{:.1f}\" y=\"{:.1f}\" text-anchor=\"{}\">{}</text>\n", kind,
                      at_x, at_y, anchor, escaped(words));
}

bool Chart::name(LabelLayout& layout, double at_x, double foot, double reach, const std::string& words,
                 double end) {
  constexpr double kTextSize = 13;
  const auto label =
      layout.place({at_x, foot}, 0, text_width(words, kTextSize, true), kTextSize + 3, reach, {0, -9});
  if (!label) return false;
  const Box& box = label->box;
  text((box.left + box.right) / 2, box.bottom - 4, "middle", words, "c-strong");
  line(std::clamp(at_x, box.left, box.right), box.bottom, at_x, end, "c-level");
  return true;
}

void Chart::axis(double y, const std::string& name, bool whole) {
  line(kLeft, y, width_ - kRight, y, "c-axis");
  const int many = kind_ == ChartWidth::kWide ? 6 : 4;
  const double step =
      whole ? std::max(1.0, tick_step(high_ - low_, 2 * many)) : tick_step(high_ - low_, many);
  for (double at = std::ceil(low_ / step - 1e-9) * step; at <= high_ + step * 1e-9; at += step) {
    line(x(at), y, x(at), y + 5, "c-axis");
    text(x(at), y + 20, "middle", fmt::format("{:.6g}", std::fabs(at) < step * 1e-9 ? 0.0 : at));
  }
  bottom_ = y + 28;
  below(name);
}

void Chart::below(const std::string& words) {
  constexpr double kSmall = 11, kLine = 15;
  for (const std::string& line_of_words : wrapped(words, width_ - 16, kSmall)) {
    const double half = text_width(line_of_words, kSmall, false) / 2;
    const double middle = std::clamp((kLeft + width_ - kRight) / 2, 4 + half, width_ - 4 - half);
    text(middle, bottom_ + 12, "middle", line_of_words, "c-small");
    bottom_ += kLine;
  }
}

std::string Chart::done() {
  return fmt::format(
             "<svg class=\"chart\" viewBox=\"0 0 {:.0f} {:.0f}\" role=\"img\" aria-label=\"{}\">\n"
             "<defs><pattern id=\"{}\" width=\"6\" height=\"6\" patternUnits=\"userSpaceOnUse\" "
             "patternTransform=\"rotate(45)\"><path d=\"M0 0V6\" class=\"s-jump\" "
             "stroke-width=\"2\"/></pattern>"
             "<pattern id=\"{}\" width=\"7\" height=\"7\" patternUnits=\"userSpaceOnUse\"><path d=\"M0 0L7 "
             "7M7 "
             "0L0 7\" "
             "class=\"c-cross\" stroke-width=\"1\"/></pattern></defs>\n",
             width_, bottom_ + 4, escaped(title_), pattern("hatch"), pattern("mesh")) +
         svg_ + "</svg>\n";
}

}  // namespace stanchion
