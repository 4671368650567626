// Places for the labels of a drawing: beside what they name, on nothing else, inside the frame.
#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

#include "report/projection.hpp"

namespace stanchion {

/// A rectangle of the page, y downwards.
struct Box {
  double left = 0, top = 0, right = 0, bottom = 0;

  static Box around(const Point& centre, double half_width, double half_height);
  bool meets(const Box& other) const;
  bool contains(const Box& other) const;
};

/// Width of a line of text at `size` pixels an em: not less than in the widest of the faces that pages name
/// (DejaVu Sans; its advances as measured, rounded up by classes of characters).
double text_width(std::string_view text, double size, bool bold);

/// `text` if it is not wider than `width`, else its beginning with an ellipsis.
std::string shortened(std::string_view text, double width, double size, bool bold);

/// `text` in lines no wider than `width`, broken at blanks.
std::vector<std::string> wrapped(std::string_view text, double width, double size);

struct PlacedLabel {
  Box box;
  int side = 1;      ///< 1 to the right, -1 to the left of what it names, 0 above or below
  bool led = false;  ///< so far off, or so near to something else, that a line must lead to it
  Point from, to;    ///< of that line
};

class LabelLayout {
 public:
  explicit LabelLayout(const Box& frame) : frame_(frame) {}

  void keep_clear(const Box& box) { taken_.push_back(box); }
  /// Better not covered, at this cost (the length of a leading line in pixels costs a fifth of it).
  void rather_clear(const Point& from, const Point& to, double cost);
  void rather_clear(const Point& dot, double radius, double cost);

  /// Beside the circle of `radius` around `anchor`, at most `reach` away, towards `preferred` if it is not
  /// zero; nothing where there is no room. What is placed is kept clear from then on.
  std::optional<PlacedLabel> place(const Point& anchor, double radius, double width, double height,
                                   double reach, const Point& preferred = {});
  /// The same, but where all around is taken the nearest free place in the frame; its line may then cross
  /// others. Nothing only where no place in the frame is free.
  std::optional<PlacedLabel> place_somewhere(const Point& anchor, double radius, double width, double height);

 private:
  struct Stroke {
    Point from, to;
    double cost;
  };
  struct Dot {
    Point at;
    double radius, cost;
  };
  bool is_free(const Box& box) const;
  double cost_of(const Box& box) const;
  bool near_other(const Box& box, const Point& anchor, double distance) const;
  bool line_is_free(const Point& from, const Point& to, const Point& anchor, double radius) const;
  PlacedLabel settled(const Box& box, const Point& anchor, double radius) const;
  void take(const PlacedLabel& label);

  Box frame_;
  std::vector<Box> taken_;
  std::vector<Stroke> lines_;  ///< leading lines of labels already placed
  std::vector<Stroke> strokes_;
  std::vector<Dot> dots_;
};

}  // namespace stanchion
