#include "specimen/beam.hpp"

#include <cmath>

#include "specimen/line_element.hpp"

namespace stanchion::specimen {
namespace {

/// Rows: the local x, y, z axes in global components.
Table<3, 3> local_axes(const Member& member) {
  const auto unit = [](const Point& p) {
    const double norm = std::sqrt(dot(p, p));
    return Point{p.x / norm, p.y / norm, p.z / norm};
  };
  const Point x = unit(member.end - member.start);
  const Point y = unit(cross(member.up, x));
  const Point z = cross(x, y);
  return {{{x.x, x.y, x.z}, {y.x, y.y, y.z}, {z.x, z.y, z.z}}};
}

ElementMatrix<12> to_global(const ElementMatrix<12>& local, const Member& member) {
  const Table<3, 3> axes = local_axes(member);
  ElementMatrix<12> t;
  for (int block = 0; block < 4; ++block) {
    for (int i = 0; i < 3; ++i) {
      for (int j = 0; j < 3; ++j) {
        t(3 * block + i, 3 * block + j) = axes[static_cast<std::size_t>(i)][static_cast<std::size_t>(j)];
      }
    }
  }
  return congruence(local, t);
}

/// Adds a bending line in the local x-y plane (v, rz = v') or, with `vertical`, in x-z (w, ry = -w').
void add_line(ElementMatrix<12>& local, const ElementMatrix<4>& line, bool vertical) {
  const std::array<int, 4> place = vertical ? std::array{2, 4, 8, 10} : std::array{1, 5, 7, 11};
  const std::array<double, 4> sign = vertical ? std::array{1., -1., 1., -1.} : std::array{1., 1., 1., 1.};
  for (std::size_t i = 0; i < 4; ++i) {
    for (std::size_t j = 0; j < 4; ++j) {
      local(place[i], place[j]) += sign[i] * sign[j] * line(static_cast<int>(i), static_cast<int>(j));
    }
  }
}

/// Adds [same, other; other, same] at the local unknown `place` of the two ends.
void add_pair(ElementMatrix<12>& local, int place, double same, double other) {
  local(place, place) += same;
  local(place + 6, place + 6) += same;
  local(place, place + 6) += other;
  local(place + 6, place) += other;
}

}  // namespace

double length_of(const Member& member) {
  const Point d = member.end - member.start;
  return std::sqrt(dot(d, d));
}

Point natural_up(const Point& start, const Point& end) {
  const Point d = end - start;
  const bool vertical = d.x * d.x + d.y * d.y <= 1e-12 * dot(d, d);
  return vertical ? Point{1, 0, 0} : Point{0, 0, 1};
}

ElementMatrix<12> beam_stiffness(const Member& member, const Material& material, const Section& section) {
  const double length = length_of(member), e = material.youngs_modulus;
  const double axial = e * section.area / length;
  const double twist = e / (2 * (1 + material.poisson)) * section.torsion / length;
  ElementMatrix<12> local;
  add_pair(local, 0, axial, -axial);
  add_pair(local, 3, twist, -twist);
  add_line(local, line_bending(e * section.inertia_z, length), false);
  add_line(local, line_bending(e * section.inertia_y, length), true);
  return to_global(local, member);
}

ElementMatrix<12> beam_geometric(const Member& member, double axial_force) {
  const ElementMatrix<4> line = line_geometric(axial_force, length_of(member));
  ElementMatrix<12> local;
  add_line(local, line, false);
  add_line(local, line, true);
  return to_global(local, member);
}

ElementMatrix<12> beam_mass(const Member& member, const Material& material, const Section& section) {
  const double length = length_of(member), mass = material.density * section.area * length;
  const double polar = material.density * (section.inertia_y + section.inertia_z) * length;
  const ElementMatrix<4> line = line_mass(material.density * section.area, length);
  ElementMatrix<12> local;
  add_pair(local, 0, mass / 3, mass / 6);
  add_pair(local, 3, polar / 3, polar / 6);
  add_line(local, line, false);
  add_line(local, line, true);
  return to_global(local, member);
}

ElementMatrix<12> beam_lumped_mass(const Member& member, const Material& material, const Section& section) {
  const double half = material.density * section.area * length_of(member) / 2;
  ElementMatrix<12> m;
  for (int i = 0; i < 3; ++i) m(i, i) = m(i + 6, i + 6) = half;
  return m;
}

ElementMatrix<12> bar_stiffness(const Member& member, const Material& material, const Section& section) {
  const double axial = material.youngs_modulus * section.area / length_of(member);
  ElementMatrix<12> local;
  add_pair(local, 0, axial, -axial);
  return to_global(local, member);
}

ElementMatrix<12> bar_geometric(const Member& member, double axial_force) {
  const double across = axial_force / length_of(member);
  ElementMatrix<12> local;
  add_pair(local, 1, across, -across);
  add_pair(local, 2, across, -across);
  return to_global(local, member);
}

}  // namespace stanchion::specimen
