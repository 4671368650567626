#include "diagnose/rigid_motion.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "diagnose/small_eigen.hpp"

namespace stanchion {
namespace {

using Triple = std::array<double, 3>;

double dot(const Triple& a, const Triple& b) {
  return a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
}
double length(const Triple& a) {
  return std::sqrt(dot(a, a));
}
Triple cross(const Triple& a, const Triple& b) {
  return {a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]};
}

RigidMotion basic(int which, double radius) {
  RigidMotion motion;
  if (which < 3) {
    motion.t[static_cast<std::size_t>(which)] = 1;
  } else {
    motion.w[static_cast<std::size_t>(which - 3)] = 1 / radius;
  }
  return motion;
}

RigidMotion combined(const std::vector<RigidMotion>& motions, const double* coefficient, std::size_t stride) {
  RigidMotion sum;
  for (std::size_t k = 0; k < motions.size(); ++k) {
    for (std::size_t d = 0; d < 3; ++d) {
      sum.t[d] += coefficient[k * stride] * motions[k].t[d];
      sum.w[d] += coefficient[k * stride] * motions[k].w[d];
    }
  }
  return sum;
}

const char* kAxis[] = {"x", "y", "z"};

/// The coordinate axis that `direction` (a unit vector) is parallel to, or -1.
int along_axis(const Triple& direction) {
  for (int d = 0; d < 3; ++d) {
    if (std::fabs(direction[static_cast<std::size_t>(d)]) > 1 - 1e-6) return d;
  }
  return -1;
}

std::string triple_in_words(const Triple& p) {
  const auto tidy = [](double v) { return std::fabs(v) < 1e-9 ? 0.0 : v; };
  return fmt::format("({:.4g}, {:.4g}, {:.4g})", tidy(p[0]), tidy(p[1]), tidy(p[2]));
}

std::string translation_in_words(const Triple& t) {
  const double size = length(t);
  const Triple unit{t[0] / size, t[1] / size, t[2] / size};
  const int axis = along_axis(unit);
  return axis >= 0 ? fmt::format("translation {}", kAxis[axis])
                   : "translation along " + triple_in_words(unit);
}

std::string rotation_in_words(const RigidFit& fit, const RigidMotion& motion, bool name_place) {
  const double w2 = dot(motion.w, motion.w), size = std::sqrt(w2);
  const Triple unit{motion.w[0] / size, motion.w[1] / size, motion.w[2] / size};
  const int axis = along_axis(unit);
  std::string text =
      axis >= 0 ? fmt::format("rotation about {}", kAxis[axis]) : "rotation about " + triple_in_words(unit);
  if (!name_place) return text;
  const Triple arm = cross(motion.w, motion.t);
  const Triple through{fit.centre[0] + arm[0] / w2, fit.centre[1] + arm[1] / w2, fit.centre[2] + arm[2] / w2};
  text += " through " + triple_in_words(through);
  if (std::fabs(dot(motion.t, motion.w)) > 1e-6 * size * (length(motion.t) + size * fit.radius))
    text += ", with a slide along it";
  return text;
}

/// Directions held in the span of `vectors`: coordinate axes first, then what is left.
std::vector<Triple> plain_directions(const std::vector<Triple>& vectors) {
  std::vector<Triple> basis;
  const auto add = [&basis](Triple v) {
    const double before = length(v);
    for (const Triple& b : basis) {
      const double a = dot(b, v);
      for (std::size_t d = 0; d < 3; ++d) v[d] -= a * b[d];
    }
    const double size = length(v);
    if (size < 1e-6 * before || size == 0) return;
    basis.push_back({v[0] / size, v[1] / size, v[2] / size});
  };
  for (const Triple& v : vectors) add(v);
  const std::size_t rank = basis.size();
  const std::vector<Triple> span = basis;
  basis.clear();
  for (std::size_t d = 0; d < 3; ++d) {
    double inside = 0;
    for (const Triple& b : span) inside += b[d] * b[d];
    if (inside > 1 - 1e-8) {
      Triple axis{};
      axis[d] = 1;
      add(axis);
    }
  }
  for (const Triple& v : span) add(v);
  basis.resize(std::min(rank, basis.size()));
  return basis;
}

}  // namespace

std::string direction_in_words(const Triple& unit) {
  const int axis = along_axis(unit);
  return axis >= 0 ? kAxis[axis] : triple_in_words(unit);
}

double rigid_value(const Structure& s, Index position, const Triple& centre, const RigidMotion& motion) {
  const auto p = static_cast<std::size_t>(position);
  const DofKind kind = s.kind[p];
  if (!is_translation(kind) && !is_rotation(kind)) return 0;
  const auto node = static_cast<std::size_t>(s.node_of[p]);
  Triple value = motion.w;
  if (is_translation(kind)) {
    value = motion.t;
    if (s.placed) {
      const Triple& r = s.place[node];
      const Triple turn = cross(motion.w, {r[0] - centre[0], r[1] - centre[1], r[2] - centre[2]});
      for (std::size_t d = 0; d < 3; ++d) value[d] += turn[d];
    }
  }
  const auto d = static_cast<std::size_t>(kind) % 3;
  if (s.axes[node] == nullptr) return value[d];
  const auto& axes = *s.axes[node];
  return axes[3 * d] * value[0] + axes[3 * d + 1] * value[1] + axes[3 * d + 2] * value[2];
}

RigidFit fit_rigid_motions(const Structure& s, const LocalVectors& local, const Buffer<double>& scale,
                           double tolerance) {
  RigidFit fit;
  if (!s.named || local.count == 0) return fit;
  const std::vector<Index>&nodes = local.nodes, &rows = local.rows;
  Index placed = 0;
  for (const Index node : nodes) {
    if (!s.placed || !s.has_place[static_cast<std::size_t>(node)]) continue;
    ++placed;
    for (std::size_t d = 0; d < 3; ++d) fit.centre[d] += s.place[static_cast<std::size_t>(node)][d];
  }
  const bool turns = s.placed && placed == static_cast<Index>(nodes.size());
  if (turns) {
    for (double& c : fit.centre) c /= placed;
    double sum = 0;
    for (const Index node : nodes) {
      for (std::size_t d = 0; d < 3; ++d) {
        const double r = s.place[static_cast<std::size_t>(node)][d] - fit.centre[d];
        sum += r * r;
      }
    }
    fit.radius = sum > 0 ? std::sqrt(sum / placed) : 1;
  }
  const int tried = turns ? 6 : 3;
  const std::size_t n = rows.size(), m = local.count;
  // Columns of the rigid motions in scaled coordinates, orthonormalised; each kept one as a motion.
  std::vector<std::vector<double>> basis;
  std::vector<RigidMotion> as_motion;
  for (int which = 0; which < tried; ++which) {
    RigidMotion motion = basic(which, fit.radius);
    std::vector<double> column(n);
    for (std::size_t i = 0; i < n; ++i)
      column[i] = rigid_value(s, rows[i], fit.centre, motion) / scale[rows[i]];
    double before = 0;
    for (const double v : column) before += v * v;
    if (before == 0) continue;
    for (int pass = 0; pass < 2; ++pass) {
      for (std::size_t b = 0; b < basis.size(); ++b) {
        double along = 0;
        for (std::size_t i = 0; i < n; ++i) along += basis[b][i] * column[i];
        for (std::size_t i = 0; i < n; ++i) column[i] -= along * basis[b][i];
        for (std::size_t d = 0; d < 3; ++d) {
          motion.t[d] -= along * as_motion[b].t[d];
          motion.w[d] -= along * as_motion[b].w[d];
        }
      }
    }
    double left = 0;
    for (const double v : column) left += v * v;
    if (left < 1e-16 * before) continue;
    const double size = std::sqrt(left);
    for (double& v : column) v /= size;
    for (std::size_t d = 0; d < 3; ++d) {
      motion.t[d] /= size;
      motion.w[d] /= size;
    }
    basis.push_back(std::move(column));
    as_motion.push_back(motion);
  }
  fit.possible = static_cast<Index>(basis.size());
  if (basis.empty()) return fit;
  // Cosines between the two spans: eigenvalues of (P^T X)^T (P^T X).
  std::vector<double> overlap(basis.size() * m, 0.0), gram(m * m, 0.0);
  for (std::size_t b = 0; b < basis.size(); ++b) {
    for (std::size_t i = 0; i < n; ++i) {
      const double* row = local.row(i);
      for (std::size_t c = 0; c < m; ++c) overlap[b * m + c] += basis[b][i] * row[c];
    }
  }
  for (std::size_t p = 0; p < m; ++p) {
    for (std::size_t q = 0; q < m; ++q) {
      for (std::size_t b = 0; b < basis.size(); ++b)
        gram[p * m + q] += overlap[b * m + p] * overlap[b * m + q];
    }
  }
  const SmallEigen eigen = small_eigen(gram, static_cast<Index>(m));
  for (std::size_t k = m; k-- > 0;) {
    if (eigen.values[k] < 1 - tolerance * tolerance) break;
    std::vector<double> coefficient(m), of_basis(basis.size(), 0.0);
    for (std::size_t c = 0; c < m; ++c) coefficient[c] = eigen.vectors[c * m + k];
    for (std::size_t b = 0; b < basis.size(); ++b) {
      for (std::size_t c = 0; c < m; ++c) of_basis[b] += overlap[b * m + c] * coefficient[c];
    }
    fit.motions.push_back(combined(as_motion, of_basis.data(), 1));
    fit.of_columns.push_back(std::move(coefficient));
  }
  return fit;
}

std::vector<std::string> motions_in_words(const RigidFit& fit) {
  // Combinations whose turn vanishes are translations; the turns of the others are named by their directions.
  const std::size_t m = fit.motions.size();
  if (m == 0) return {};
  std::vector<double> gram(m * m);
  for (std::size_t p = 0; p < m; ++p) {
    for (std::size_t q = 0; q < m; ++q)
      gram[p * m + q] = fit.radius * fit.radius * dot(fit.motions[p].w, fit.motions[q].w);
  }
  double size = 0;
  for (const RigidMotion& motion : fit.motions) {
    size = std::max(size, dot(motion.t, motion.t) + fit.radius * fit.radius * dot(motion.w, motion.w));
  }
  const SmallEigen eigen = small_eigen(gram, static_cast<Index>(m));
  std::vector<Triple> translations, turns;
  std::vector<RigidMotion> turning;
  for (std::size_t k = 0; k < m; ++k) {
    const RigidMotion motion = combined(fit.motions, eigen.vectors.data() + k, m);
    if (eigen.values[k] <= 1e-10 * size) {
      translations.push_back(motion.t);
    } else {
      turns.push_back(motion.w);
      turning.push_back(motion);
    }
  }
  std::vector<std::string> words;
  for (const Triple& t : plain_directions(translations)) words.push_back(translation_in_words(t));
  // Where a translation is free across it, an axis has no place of its own.
  const bool place = turning.size() == 1 && translations.empty();
  if (turning.size() == 1) {
    words.push_back(rotation_in_words(fit, turning[0], place));
  } else {
    for (const Triple& w : plain_directions(turns)) words.push_back(rotation_in_words(fit, {{}, w}, false));
  }
  return words;
}

}  // namespace stanchion
