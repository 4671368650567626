// The 8-node brick: rigid motions, constant strain on distorted corners, mass.
#include "specimen/brick.hpp"

#include <gtest/gtest.h>

#include "specimen/dense_spectrum.hpp"

namespace stanchion::specimen {
namespace {

using testing::dense;
using testing::eigenvalues;

const BrickCorners kCube{
    {{0, 0, 0}, {1, 0, 0}, {1, 1, 0}, {0, 1, 0}, {0, 0, 1}, {1, 0, 1}, {1, 1, 1}, {0, 1, 1}}};
const BrickCorners kCrooked{{{0, 0, 0},
                             {1.3, 0.1, -0.1},
                             {1.1, 0.9, 0.1},
                             {-0.1, 1.2, 0},
                             {0.1, -0.1, 0.8},
                             {1.2, 0, 1.1},
                             {0.9, 1.1, 0.9},
                             {0, 0.9, 1.2}}};
const Material kUnit{1.0, 0.25, 3.0};

/// Displacements u = A x at the corners; A by rows.
Eigen::VectorXd linear_field(const BrickCorners& corners, const Eigen::Matrix3d& a) {
  Eigen::VectorXd u(24);
  for (std::size_t i = 0; i < 8; ++i) {
    u.segment<3>(static_cast<Eigen::Index>(3 * i)) =
        a * Eigen::Vector3d(corners[i].x, corners[i].y, corners[i].z);
  }
  return u;
}

double volume(const BrickCorners& corners) {
  return dense(brick_mass(corners, {1, 0, 1})).sum() / 3;
}

TEST(Brick, HasExactlySixZeroEigenvaluesAndIsSymmetric) {
  for (const BrickCorners& corners : {kCube, kCrooked}) {
    const Eigen::MatrixXd k = dense(brick_stiffness(corners, kUnit));
    EXPECT_EQ((k - k.transpose()).cwiseAbs().maxCoeff(), 0);
    const Eigen::VectorXd values = eigenvalues(k);
    EXPECT_LT(std::abs(values(5)), 1e-14);
    EXPECT_GT(values(6), 1e-3);
  }
}

TEST(Brick, RigidMotionsCostNoEnergy) {
  const Eigen::MatrixXd k = dense(brick_stiffness(kCrooked, kUnit));
  Eigen::Matrix3d spin = Eigen::Matrix3d::Zero();
  spin(0, 1) = -0.3, spin(1, 0) = 0.3, spin(0, 2) = 0.7, spin(2, 0) = -0.7;
  EXPECT_LT((k * linear_field(kCrooked, spin)).norm(), 1e-14);
}

TEST(Brick, ConstantStrainHasTheExactEnergyOnAnyShape) {
  Eigen::Matrix3d a;
  a << 0.2, 0.1, -0.3, 0.4, -0.5, 0.2, 0.1, 0.3, 0.7;
  const Eigen::Matrix3d strain = (a + a.transpose()) / 2;
  const double mu = kUnit.youngs_modulus / (2 * (1 + kUnit.poisson));
  const double lame = 2 * mu * kUnit.poisson / (1 - 2 * kUnit.poisson);
  const double density = 2 * mu * strain.squaredNorm() + lame * std::pow(strain.trace(), 2);
  for (const BrickCorners& corners : {kCube, kCrooked}) {
    const Eigen::VectorXd u = linear_field(corners, a);
    EXPECT_NEAR(u.dot(dense(brick_stiffness(corners, kUnit)) * u), density * volume(corners), 1e-13);
  }
}

TEST(Brick, PatchTestPassesAroundAnInnerNode) {
  // Eight crooked bricks around one inner node: under a linear displacement no force acts on it.
  Eigen::Matrix3d a;
  a << 0.2, 0.1, -0.3, 0.4, -0.5, 0.2, 0.1, 0.3, 0.7;
  const auto place = [](int i, int j, int k) {
    const bool inner = i == 1 && j == 1 && k == 1;
    return Point{i + (inner ? 0.2 : 0.05 * j), j + (inner ? -0.15 : 0.04 * k), k + (inner ? 0.1 : 0.03 * i)};
  };
  Eigen::Vector3d force = Eigen::Vector3d::Zero();
  const int order[8][3] = {{0, 0, 0}, {1, 0, 0}, {1, 1, 0}, {0, 1, 0},
                           {0, 0, 1}, {1, 0, 1}, {1, 1, 1}, {0, 1, 1}};
  for (int brick = 0; brick < 8; ++brick) {
    BrickCorners corners;
    int inner = 0;
    for (int c = 0; c < 8; ++c) {
      const int i = order[c][0] + (brick & 1), j = order[c][1] + (brick >> 1 & 1),
                k = order[c][2] + (brick >> 2);
      corners[static_cast<std::size_t>(c)] = place(i, j, k);
      if (i == 1 && j == 1 && k == 1) inner = c;
    }
    const Eigen::VectorXd forces = dense(brick_stiffness(corners, kUnit)) * linear_field(corners, a);
    force += forces.segment<3>(3 * inner);
  }
  EXPECT_LT(force.norm(), 1e-14);
}

TEST(Brick, MassIsPositiveDefiniteAndWhole) {
  const Eigen::MatrixXd m = dense(brick_mass(kCrooked, kUnit));
  const Eigen::MatrixXd lumped = dense(brick_lumped_mass(kCrooked, kUnit));
  EXPECT_GT(eigenvalues(m)(0), 0);
  EXPECT_NEAR(m.sum(), 3 * 3.0 * volume(kCrooked), 1e-12);
  EXPECT_NEAR(lumped.diagonal().sum(), m.sum(), 1e-12);
  EXPECT_NEAR(volume(kCube), 1, 1e-14);
}

}  // namespace
}  // namespace stanchion::specimen
