#include "report/projection.hpp"

#include <algorithm>
#include <cmath>

namespace stanchion {
namespace {

double dot(const Triple& a, const Triple& b) {
  return a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
}
Triple cross(const Triple& a, const Triple& b) {
  return {a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]};
}
Triple unit(const Triple& a) {
  const double size = std::sqrt(dot(a, a));
  return size > 0 ? Triple{a[0] / size, a[1] / size, a[2] / size} : Triple{0, 0, 1};
}

/// Eigenvectors of a symmetric 3 x 3 matrix, ascending, by Jacobi rotations.
std::array<Triple, 3> axes_of(std::array<Triple, 3> a) {
  std::array<Triple, 3> v{Triple{1, 0, 0}, Triple{0, 1, 0}, Triple{0, 0, 1}};
  for (int sweep = 0; sweep < 30; ++sweep) {
    for (std::size_t p = 0; p < 2; ++p) {
      for (std::size_t q = p + 1; q < 3; ++q) {
        if (std::fabs(a[p][q]) < 1e-15) continue;
        const double theta = (a[q][q] - a[p][p]) / (2 * a[p][q]);
        const double t = (theta >= 0 ? 1.0 : -1.0) / (std::fabs(theta) + std::hypot(theta, 1.0));
        const double c = 1 / std::hypot(t, 1.0), s = t * c;
        for (std::size_t k = 0; k < 3; ++k) {
          const double x = a[k][p], y = a[k][q];
          a[k][p] = c * x - s * y;
          a[k][q] = s * x + c * y;
        }
        for (std::size_t k = 0; k < 3; ++k) {
          const double x = a[p][k], y = a[q][k];
          a[p][k] = c * x - s * y;
          a[q][k] = s * x + c * y;
        }
        for (std::size_t k = 0; k < 3; ++k) {
          const double x = v[p][k], y = v[q][k];
          v[p][k] = c * x - s * y;
          v[q][k] = s * x + c * y;
        }
      }
    }
  }
  std::array<std::size_t, 3> order{0, 1, 2};
  std::sort(order.begin(), order.end(), [&](std::size_t x, std::size_t y) { return a[x][x] < a[y][y]; });
  return {v[order[0]], v[order[1]], v[order[2]]};
}

}  // namespace

Projection::Projection(const ViewAxes& view, const std::vector<Triple>& shown, double width, double height,
                       double margin)
    : view_(view) {
  double low_x = INFINITY, high_x = -INFINITY, low_y = INFINITY, high_y = -INFINITY;
  for (const Triple& p : shown) {
    const double x = dot(p, view.right), y = dot(p, view.up);
    low_x = std::min(low_x, x);
    high_x = std::max(high_x, x);
    low_y = std::min(low_y, y);
    high_y = std::max(high_y, y);
  }
  if (shown.empty()) low_x = high_x = low_y = high_y = 0;
  const double span_x = std::max(high_x - low_x, 1e-12), span_y = std::max(high_y - low_y, 1e-12);
  scale_ = std::min((width - 2 * margin) / span_x, (height - 2 * margin) / span_y);
  x_ = width / 2 - scale_ * (low_x + high_x) / 2;
  y_ = height / 2 + scale_ * (low_y + high_y) / 2;
}

Point Projection::at(const Triple& place) const {
  return {x_ + scale_ * dot(place, view_.right), y_ - scale_ * dot(place, view_.up)};
}

std::uint64_t cell_of(const Point& point, double size) {
  const auto x = static_cast<std::int64_t>(std::floor(point.x / size)),
             y = static_cast<std::int64_t>(std::floor(point.y / size));
  return static_cast<std::uint64_t>(x) * 0x9E3779B97F4A7C15ULL ^ static_cast<std::uint64_t>(y);
}

ViewAxes best_view(const Picture& picture, const std::vector<std::array<float, 3>>& shape) {
  std::array<Triple, 3> seen{};
  Triple mean{};
  double motion = 0, spread = 0;
  for (const Triple& p : picture.place) {
    for (std::size_t d = 0; d < 3; ++d) mean[d] += p[d] / static_cast<double>(picture.place.size());
  }
  for (const auto& u : shape) {
    for (const float v : u) motion += static_cast<double>(v) * static_cast<double>(v);
  }
  for (const Triple& p : picture.place) {
    for (std::size_t d = 0; d < 3; ++d) spread += (p[d] - mean[d]) * (p[d] - mean[d]);
  }
  for (std::size_t i = 0; i < 3; ++i) {
    for (std::size_t j = 0; j < 3; ++j) {
      if (motion > 0) {
        for (const auto& u : shape)
          seen[i][j] += static_cast<double>(u[i]) * static_cast<double>(u[j]) / motion;
      }
      if (!(spread > 0)) continue;
      for (const Triple& p : picture.place) seen[i][j] += 0.4 * (p[i] - mean[i]) * (p[j] - mean[j]) / spread;
    }
  }
  const auto axes = axes_of(seen);
  ViewAxes view;
  Triple toward = axes[0];
  // Of the two sides the one from above and from the front.
  if (toward[2] < -1e-9 || (std::fabs(toward[2]) <= 1e-9 && toward[1] > 0))
    toward = {-toward[0], -toward[1], -toward[2]};
  Triple aside = axes[1], along = axes[2];
  constexpr Triple kFrontAboveRight{0.6, -0.7, 0.9};
  if (dot(aside, kFrontAboveRight) < 0) aside = {-aside[0], -aside[1], -aside[2]};
  if (dot(along, kFrontAboveRight) < 0) along = {-along[0], -along[1], -along[2]};
  for (std::size_t d = 0; d < 3; ++d) toward[d] += 0.40 * aside[d] + 0.24 * along[d];
  view.toward = unit(toward);
  // Seen from so high that z would no longer hold the picture upright, y does.
  const Triple vertical = std::fabs(view.toward[2]) > 0.8 ? Triple{0, 1, 0} : Triple{0, 0, 1};
  view.right = unit(cross(vertical, view.toward));
  view.up = cross(view.toward, view.right);
  return view;
}

}  // namespace stanchion
