// Rigid motions against the exact six vectors, in global and in nodal axes; the small eigenproblems behind
// them.
#include "diagnose/rigid_motion.hpp"

#include <gtest/gtest.h>

#include <cmath>

#include "diagnose/planted.hpp"
#include "diagnose/small_eigen.hpp"

namespace stanchion {
namespace {

using namespace test;

TEST(SmallEigen, MatchesTheClosedFormOfAChain) {
  constexpr Index n = 12;
  std::vector<double> matrix(n * n, 0.0);
  for (Index i = 0; i < n; ++i) {
    matrix[static_cast<std::size_t>(i * n + i)] = 2;
    if (i > 0)
      matrix[static_cast<std::size_t>(i * n + i - 1)] = matrix[static_cast<std::size_t>((i - 1) * n + i)] =
          -1;
  }
  const SmallEigen eigen = small_eigen(matrix, n);
  for (Index k = 1; k <= n; ++k) {
    // 4 sin^2(k pi / (2 (n + 1))), closed form.
    const double s = std::sin(k * 3.14159265358979323846 / (2 * (n + 1)));
    EXPECT_NEAR(eigen.values[static_cast<std::size_t>(k - 1)], 4 * s * s, 1e-13);
  }
}

/// The free frame with the axes of every node turned by an angle of its own: K' = R K R^T, R block diagonal.
TEST(RigidMotions, AreFoundInNodalAxes) {
  const Specimen frame = specimen_with("frame", 600, Fault::kFree);
  PlantedModel model;
  model.append(frame, 0, 0);
  std::map<std::int64_t, std::array<double, 9>> axes;
  for (const auto& [node, place] : model.place) {
    // Turned about x, then about the new z: rows are the node's own x, y, z in global directions.
    const double a = 0.3 * static_cast<double>(node), b = 0.7 * static_cast<double>(node);
    const double ca = std::cos(a), sa = std::sin(a), cb = std::cos(b), sb = std::sin(b);
    axes[node] = {cb, sb * ca, sb * sa, -sb, cb * ca, cb * sa, 0, -sa, ca};
  }
  const SymmetricMatrix k = model.matrix();
  std::vector<Triplet> turned;
  const auto spread = [&](Index e) {  // equation e = sum over own directions d of R(d, e's direction)
    std::vector<std::pair<Index, double>> terms;
    const auto own = static_cast<Index>(e % 6), base = e - own, first = base + (own < 3 ? 0 : 3);
    for (Index d = 0; d < 3; ++d) {
      terms.emplace_back(
          first + d,
          axes.at(model.node[static_cast<std::size_t>(e)])[static_cast<std::size_t>(3 * d + own % 3)]);
    }
    return terms;
  };
  for (Index j = 0; j < k.rows; ++j) {
    for (Offset p = k.column_start[j]; p < k.column_start[Offset{j} + 1]; ++p) {
      for (const auto& [a, x] : spread(k.row[p])) {
        for (const auto& [b, y] : spread(j)) {
          if (a >= b) turned.push_back({a, b, x * y * k.value[p]});
          if (k.row[p] != j && b >= a) turned.push_back({b, a, x * y * k.value[p]});
        }
      }
    }
  }
  model.entries = std::move(turned);
  ModelFiles files;
  Request request = model.request(files);
  std::string text = "node,xx,xy,xz,yx,yy,yz,zx,zy,zz\n";
  char number[32];
  for (const auto& [node, r] : axes) {
    text += std::to_string(node);
    for (const double v : r) {
      std::snprintf(number, sizeof(number), ",%.17g", v);
      text += number;
    }
    text += "\n";
  }
  request.input.axes = files.text("axes.csv", text);
  const Outcome with_axes = answer(run_locate(request, {}));
  ASSERT_EQ(with_axes.located->directions.size(), 1U) << summary(with_axes);
  EXPECT_EQ(with_axes.located->directions[0].cause, Cause::kLoosePart);
  EXPECT_EQ(with_axes.located->directions[0].count, 6);
  EXPECT_EQ(with_axes.located->directions[0].motions.size(), 6U);
  ASSERT_TRUE(with_axes.located->components[0].rigid_energy);
  for (const double energy : *with_axes.located->components[0].rigid_energy)
    EXPECT_LT(std::fabs(energy), 1e-14);
  // Without the axes global directions are wrong: six motions are still counted, but none is taken for a
  // rigid one.
  request.input.axes.reset();
  const Outcome without = answer(run_locate(request, {}));
  EXPECT_EQ(without.check->inertia.zero, 6);
  for (const Direction& d : without.located->directions) EXPECT_TRUE(d.motions.empty()) << d.explanation;
}

TEST(RigidMotions, OfABracedFreeBodyHaveNoEnergyAndOfAHeldOneHaveSome) {
  for (const Fault fault : {Fault::kFree, Fault::kNone}) {
    PlantedModel model;
    model.append(specimen_with("solid", 1000, fault), 0, 0);
    ModelFiles files;
    const Outcome outcome = answer(run_locate(model.request(files), {}));
    ASSERT_TRUE(outcome.located->components.at(0).rigid_energy);
    for (const double energy : *outcome.located->components[0].rigid_energy) {
      if (fault == Fault::kFree) {
        EXPECT_LT(std::fabs(energy), 1e-14);
      } else {
        EXPECT_GT(energy, 1e-4);
      }
    }
  }
}

TEST(NegativePatch, OfAnElementWithTheWrongSignIsLocal) {
  PlantedModel model;
  const Specimen solid = specimen_with("solid", 3000, Fault::kNone);
  model.append(solid, 0, 0);
  // The eight nodes of one brick far from the support lose more than their stiffness along x.
  std::vector<std::int64_t> corner;
  std::array<double, 3> at{};  // the node nearest to the middle of the block of 8 x 4 x 4 m
  double nearest = 1e300;
  for (const auto& [node, p] : model.place) {
    const double far = std::hypot(p[0] - 4, p[1] - 2, p[2] - 2);
    if (far < nearest) nearest = far, at = p;
  }
  for (const auto& [node, p] : model.place) {
    if (std::fabs(p[0] - at[0]) < 0.6 && p[0] >= at[0] && std::fabs(p[1] - at[1]) < 0.6 && p[1] >= at[1] &&
        std::fabs(p[2] - at[2]) < 0.6 && p[2] >= at[2])
      corner.push_back(node);
  }
  ASSERT_EQ(corner.size(), 8U);
  for (const std::int64_t node : corner) {
    const Index e = model.equation(node, "ux");
    model.entries.push_back({e, e, -1.6 * model.diagonal(e)});
  }
  model.shuffle(2);
  ModelFiles files;
  const Outcome outcome = answer(run_locate(model.request(files), {}));
  EXPECT_GT(outcome.check->inertia.negative, 1);
  for (const Direction& d : outcome.located->directions) {
    EXPECT_EQ(d.cause, Cause::kNegativePatch) << d.explanation;
    EXPECT_LE(d.moving_nodes, 40);  // the brick and what is next to it, of some thousand nodes
  }
}

}  // namespace
}  // namespace stanchion
