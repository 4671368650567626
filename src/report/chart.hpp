// What the charts of a page have in common: a frame, an axis with round numbers, and texts.
#pragma once

#include <string>
#include <string_view>

#include "report/label_layout.hpp"

namespace stanchion {

/// How wide a chart is drawn: a page holds it twice, and shows the one that suits its window.
enum class ChartWidth { kWide, kNarrow };

/// 1, 2 or 5 times a power of ten, so that about `many` of them span `range`.
double tick_step(double range, int many);

/// An SVG element in the making, of the page's classes; x runs from `low` to `high` between its margins.
class Chart {
 public:
  static constexpr double kLeft = 84, kRight = 24;
  static constexpr const char* kDisc = "M-4.5 0a4.5 4.5 0 1 0 9 0a4.5 4.5 0 1 0-9 0Z";

  Chart(ChartWidth width, double height, const std::string& title, double low, double high);

  double width() const { return width_; }

  double x(double value) const;
  void line(double x1, double y1, double x2, double y2, const char* kind);
  /// Filled by its class, or with a pattern: "hatch" or "mesh".
  void rectangle(double left, double top, double right, double bottom, const char* kind,
                 const std::string& title, const char* pattern = nullptr);
  /// `shape` as path data around the place, "M-4-4L4 4".
  void mark(double at_x, double at_y, const char* shape, const char* kind, const std::string& title);
  void text(double at_x, double at_y, const char* anchor, std::string_view words, const char* kind = "");
  /// Words in bold no more than `reach` above (x, foot), and a line from them down to `end`; false, and
  /// nothing drawn, where there is no room.
  bool name(LabelLayout& layout, double at_x, double foot, double reach, const std::string& words,
            double end);
  /// Ticks at round numbers below y, and the name of the axis below them, in as many lines as it takes; whole
  /// numbers only if `whole`.
  void axis(double y, const std::string& name, bool whole);
  /// A line of small words below everything else.
  void below(const std::string& words);
  std::string done();

 private:
  std::string pattern(const char* name) const;

  ChartWidth kind_;
  double width_, bottom_, low_, high_;
  std::string title_, svg_;
};

}  // namespace stanchion
