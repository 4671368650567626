#include "specimen/brick.hpp"

namespace stanchion::specimen {
namespace {

constexpr Table<8, 3> kCorner{
    {{-1, -1, -1}, {1, -1, -1}, {1, 1, -1}, {-1, 1, -1}, {-1, -1, 1}, {1, -1, 1}, {1, 1, 1}, {-1, 1, 1}}};

/// Shape functions at one point: values, derivatives by x, y, z, and the volume that the point stands for.
struct BrickShape {
  std::array<double, 8> value{};
  Table<8, 3> slope{};
  double volume = 0;
};

using Matrix3 = Table<3, 3>;

double invert(const Matrix3& m, Matrix3& inverse) {
  for (std::size_t i = 0; i < 3; ++i) {
    for (std::size_t j = 0; j < 3; ++j) {
      const std::size_t r = (j + 1) % 3, s = (j + 2) % 3, p = (i + 1) % 3, q = (i + 2) % 3;
      inverse[i][j] = m[r][p] * m[s][q] - m[r][q] * m[s][p];
    }
  }
  const double determinant = m[0][0] * inverse[0][0] + m[0][1] * inverse[1][0] + m[0][2] * inverse[2][0];
  for (auto& row : inverse) {
    for (auto& value : row) value /= determinant;
  }
  return determinant;
}

BrickShape shape_at(const BrickCorners& corners, const std::array<double, 3>& s) {
  BrickShape shape;
  Table<8, 3> natural{};
  Matrix3 jacobian{}, inverse{};
  for (std::size_t a = 0; a < 8; ++a) {
    const auto& c = kCorner[a];
    const double f0 = 1 + c[0] * s[0], f1 = 1 + c[1] * s[1], f2 = 1 + c[2] * s[2];
    shape.value[a] = f0 * f1 * f2 / 8;
    natural[a] = {c[0] * f1 * f2 / 8, f0 * c[1] * f2 / 8, f0 * f1 * c[2] / 8};
    const std::array<double, 3> x{corners[a].x, corners[a].y, corners[a].z};
    for (std::size_t i = 0; i < 3; ++i) {
      for (std::size_t j = 0; j < 3; ++j) jacobian[i][j] += natural[a][i] * x[j];
    }
  }
  shape.volume = invert(jacobian, inverse);
  for (std::size_t a = 0; a < 8; ++a) {
    for (std::size_t i = 0; i < 3; ++i) {
      for (std::size_t j = 0; j < 3; ++j) shape.slope[a][i] += inverse[i][j] * natural[a][j];
    }
  }
  return shape;
}

/// Calls `visit(shape)` at the eight Gauss points (all weights are 1).
template <class Visit>
void at_gauss_points(const BrickCorners& corners, const Visit& visit) {
  for (const auto& p : kGauss2) {
    for (const auto& q : kGauss2) {
      for (const auto& r : kGauss2) visit(shape_at(corners, {p.position, q.position, r.position}));
    }
  }
}

/// Strains xx, yy, zz, xy, yz, zx (shears as engineering strains) from the 24 displacements.
Table<6, 24> strain_rows(const BrickShape& shape) {
  Table<6, 24> b{};
  for (std::size_t a = 0; a < 8; ++a) {
    const auto [x, y, z] = shape.slope[a];
    const std::size_t u = 3 * a, v = u + 1, w = u + 2;
    b[0][u] = b[3][v] = b[5][w] = x;
    b[1][v] = b[3][u] = b[4][w] = y;
    b[2][w] = b[4][v] = b[5][u] = z;
  }
  return b;
}

Table<6, 6> elasticity(const Material& material) {
  const double nu = material.poisson, shear = material.youngs_modulus / (2 * (1 + nu));
  const double lame = 2 * shear * nu / (1 - 2 * nu);
  Table<6, 6> d{};
  for (std::size_t i = 0; i < 3; ++i) {
    for (std::size_t j = 0; j < 3; ++j) d[i][j] = lame;
    d[i][i] += 2 * shear;
    d[i + 3][i + 3] = shear;
  }
  return d;
}

}  // namespace

ElementMatrix<24> brick_stiffness(const BrickCorners& corners, const Material& material) {
  ElementMatrix<24> k;
  const Table<6, 6> d = elasticity(material);
  at_gauss_points(corners, [&](const BrickShape& s) { add_gram<6, 24>(k, strain_rows(s), d, s.volume); });
  return k;
}

ElementMatrix<24> brick_mass(const BrickCorners& corners, const Material& material) {
  ElementMatrix<24> m;
  const Table<3, 3> d{{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}};
  at_gauss_points(corners, [&](const BrickShape& s) {
    Table<3, 24> b{};
    for (std::size_t a = 0; a < 8; ++a) b[0][3 * a] = b[1][3 * a + 1] = b[2][3 * a + 2] = s.value[a];
    add_gram<3, 24>(m, b, d, material.density * s.volume);
  });
  return m;
}

ElementMatrix<24> brick_lumped_mass(const BrickCorners& corners, const Material& material) {
  const ElementMatrix<24> consistent = brick_mass(corners, material);
  ElementMatrix<24> m;
  for (int i = 0; i < 24; ++i) {
    for (int j = 0; j < 24; ++j) m(i, i) += consistent(i, j);
  }
  return m;
}

}  // namespace stanchion::specimen
