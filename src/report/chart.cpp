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

Chart::Chart(double height, const std::string& title, double low, double high) : low_(low), high_(high) {
  if (!(high_ > low_)) {
    low_ -= 0.5;
    high_ += 0.5;
  }
  svg_ = fmt::format(
      "<svg class=\"chart\" viewBox=\"0 0 {:.0f} {:.0f}\" role=\"img\" aria-label=\"{}\">\n"
      "<defs><pattern id=\"hatch\" width=\"6\" height=\"6\" patternUnits=\"userSpaceOnUse\" "
      "patternTransform=\"rotate(45)\"><path d=\"M0 0V6\" class=\"s-jump\" stroke-width=\"2\"/></pattern>"
      "<pattern id=\"mesh\" width=\"7\" height=\"7\" patternUnits=\"userSpaceOnUse\"><path d=\"M0 0L7 7M7 "
      "0L0 7\" "
      "class=\"c-cross\" stroke-width=\"1\"/></pattern></defs>\n",
      kWidth, height, escaped(title));
}

double Chart::x(double value) const {
  return kLeft + (std::clamp(value, low_, high_) - low_) / (high_ - low_) * (kWidth - kLeft - kRight);
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
      pattern == nullptr ? "" : fmt::format(" fill=\"url(#{})\"", pattern), escaped(title));
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
  line(kLeft, y, kWidth - kRight, y, "c-axis");
  const double step = whole ? std::max(1.0, tick_step(high_ - low_, 12)) : tick_step(high_ - low_, 6);
  for (double at = std::ceil(low_ / step - 1e-9) * step; at <= high_ + step * 1e-9; at += step) {
    line(x(at), y, x(at), y + 5, "c-axis");
    text(x(at), y + 20, "middle", fmt::format("{:.6g}", std::fabs(at) < step * 1e-9 ? 0.0 : at));
  }
  text((kLeft + kWidth - kRight) / 2, y + 42, "middle", name, "c-small");
}

std::string Chart::done() {
  return svg_ + "</svg>\n";
}

}  // namespace stanchion
