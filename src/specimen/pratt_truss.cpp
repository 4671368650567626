#include "specimen/pratt_truss.hpp"

#include <cmath>

namespace stanchion::specimen {
namespace {

double reaction(const PrattTruss& t) {
  return t.joint_load * (t.panels - 1) / 2;
}

/// Shear in panel i, between the joints i and i + 1; positive in the left half.
double shear(const PrattTruss& t, Index i) {
  return reaction(t) - i * t.joint_load;
}

/// Bending moment of the truss as a beam, at joint i.
double moment(const PrattTruss& t, Index i) {
  return t.panel * (reaction(t) * i - t.joint_load * i * (i - 1) / 2.0);
}

/// Mirrors a joint number of the right half into the left one.
Index mirrored(const PrattTruss& t, Index joint) {
  return joint <= t.panels / 2 ? joint : t.panels - joint;
}

double lower_chord_force(const PrattTruss& t, Index i) {
  const Index outer = t.left(i) ? i : t.panels - 1 - i;
  return moment(t, outer == 0 ? 1 : outer) / t.height;
}

double upper_chord_force(const PrattTruss& t, Index i) {
  const Index inner = t.left(i) ? i + 1 : t.panels - i;
  return -moment(t, inner) / t.height;
}

double vertical_force(const PrattTruss& t, Index joint) {
  const Index j = mirrored(t, joint);
  if (j == 1) return t.joint_load;
  const double diagonal = shear(t, j - 1);
  return t.joint_load - (2 * j == t.panels ? 2 * diagonal : diagonal);
}

}  // namespace

std::vector<TrussMember> members_of(const PrattTruss& t) {
  const double slant = std::sqrt(t.panel * t.panel + t.height * t.height) / t.height;
  std::vector<TrussMember> members;
  for (Index i = 0; i < t.panels; ++i) {
    members.push_back({TrussRole::kLowerChord, {i, false}, {i + 1, false}, lower_chord_force(t, i)});
  }
  for (Index i = 1; i + 1 < t.panels; ++i) {
    members.push_back({TrussRole::kUpperChord, {i, true}, {i + 1, true}, upper_chord_force(t, i)});
    const double diagonal = std::abs(shear(t, i)) * slant;
    const TrussJoint high{t.left(i) ? i : i + 1, true}, low{t.left(i) ? i + 1 : i, false};
    members.push_back({TrussRole::kDiagonal, high, low, diagonal});
  }
  for (Index i = 1; i < t.panels; ++i) {
    members.push_back({TrussRole::kVertical, {i, false}, {i, true}, vertical_force(t, i)});
  }
  const double post = -reaction(t) * slant;
  members.push_back({TrussRole::kEndPost, {0, false}, {1, true}, post});
  members.push_back({TrussRole::kEndPost, {t.panels, false}, {t.panels - 1, true}, post});
  return members;
}

}  // namespace stanchion::specimen
