// The forces of the Pratt truss: every joint in equilibrium, and the beam formula at midspan.
#include "specimen/pratt_truss.hpp"

#include <gtest/gtest.h>

#include <array>
#include <cmath>
#include <map>

namespace stanchion::specimen {
namespace {

TEST(PrattTruss, EveryJointIsInEquilibrium) {
  for (const Index panels : {4, 6, 12, 20}) {
    const PrattTruss truss{panels, 3.0, 1.9, 24e3};
    std::map<std::pair<Index, bool>, std::array<double, 2>> sum;
    for (const TrussMember& m : members_of(truss)) {
      const double dx = (m.end.number - m.start.number) * truss.panel;
      const double dz = ((m.end.upper ? 1 : 0) - (m.start.upper ? 1 : 0)) * truss.height;
      const double length = std::hypot(dx, dz);
      for (const double sign : {1.0, -1.0}) {
        const TrussJoint& joint = sign > 0 ? m.start : m.end;
        auto& force = sum[{joint.number, joint.upper}];
        force[0] += sign * m.axial_force * dx / length;
        force[1] += sign * m.axial_force * dz / length;
      }
    }
    for (auto& [joint, force] : sum) {
      const bool support = joint.first == 0 || joint.first == panels;
      if (support) force[1] += truss.joint_load * (panels - 1) / 2;
      if (!support && !joint.second) force[1] -= truss.joint_load;
      EXPECT_NEAR(force[0], 0, 1e-6) << panels << " panels, joint " << joint.first;
      EXPECT_NEAR(force[1], 0, 1e-6) << panels << " panels, joint " << joint.first;
    }
  }
}

TEST(PrattTruss, MidspanChordCarriesTheBeamMoment) {
  const PrattTruss truss{12, 3.0, 1.9, 24e3};
  double most = 0;
  for (const TrussMember& m : members_of(truss)) {
    if (m.role == TrussRole::kUpperChord) most = std::min(most, m.axial_force);
  }
  EXPECT_NEAR(most, -(24e3 / 3) * 36 * 36 / 8 / 1.9, 1e-6);  // w L^2 / 8 over the height
}

}  // namespace
}  // namespace stanchion::specimen
