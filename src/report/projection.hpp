// From a model in space to a page: the direction to look along, and where every place falls.
#pragma once

#include <array>
#include <cstdint>
#include <vector>

#include "stanchion/located.hpp"

namespace stanchion {

using Triple = std::array<double, 3>;

/// A view: unit vectors to the right, up, and towards the eye.
struct ViewAxes {
  Triple right{1, 0, 0}, up{0, 0, 1}, toward{0, -1, 0};
};

/// The direction along which little of the motion (and of the model) is lost, a little aside so that depth
/// shows.
ViewAxes best_view(const Picture& picture, const std::vector<std::array<float, 3>>& shape);

/// A place on the page, in its units, y downwards.
struct Point {
  double x = 0, y = 0;
};

/// Fits all of `shown` between the margins of a page, in its middle, with one scale.
class Projection {
 public:
  Projection(const ViewAxes& view, const std::vector<Triple>& shown, double width, double height,
             double margin);

  Point at(const Triple& place) const;
  double scale() const { return scale_; }  ///< of the page over that of the coordinates

 private:
  ViewAxes view_;
  double scale_ = 1, x_ = 0, y_ = 0;
};

/// Number of the square of side `size` that a point is in; different squares very rarely share one.
std::uint64_t cell_of(const Point& point, double size);

}  // namespace stanchion
