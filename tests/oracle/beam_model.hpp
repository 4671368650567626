// Columns, portals and beams from cubic beam elements, put together by hand: an independent small assembler.
#pragma once

#include <array>
#include <vector>

#include "sparse/symmetric_matrix.hpp"

namespace stanchion::test {

/// Four degrees of freedom of an element: equation (negative: held) and sign.
struct BeamDof {
  Index equation = -1;
  double sign = 1;
};

/// EI = 1; cubic shape functions (Przemieniecki, Theory of Matrix Structural Analysis, 1968, ch. 5, 12, 15;
/// from memory).
class BeamModel {
 public:
  explicit BeamModel(Index equations) : equations_(equations) {}

  /// An element of length h between (w1, theta1) and (w2, theta2); `force`: compression at factor 1;
  /// `foundation`: per length and deflection; `mass`: per length.
  void add(const std::array<BeamDof, 4>& dofs, double h, double force, double foundation, double mass) {
    const double k = 1 / (h * h * h);
    const double bending[4][4] = {{12 * k, 6 * k * h, -12 * k, 6 * k * h},
                                  {6 * k * h, 4 * k * h * h, -6 * k * h, 2 * k * h * h},
                                  {-12 * k, -6 * k * h, 12 * k, -6 * k * h},
                                  {6 * k * h, 2 * k * h * h, -6 * k * h, 4 * k * h * h}};
    const double g = force / (30 * h);
    const double geometric[4][4] = {{36 * g, 3 * g * h, -36 * g, 3 * g * h},
                                    {3 * g * h, 4 * g * h * h, -3 * g * h, -g * h * h},
                                    {-36 * g, -3 * g * h, 36 * g, -3 * g * h},
                                    {3 * g * h, -g * h * h, -3 * g * h, 4 * g * h * h}};
    const double m = h / 420;
    const double weight[4][4] = {{156 * m, 22 * m * h, 54 * m, -13 * m * h},
                                 {22 * m * h, 4 * m * h * h, 13 * m * h, -3 * m * h * h},
                                 {54 * m, 13 * m * h, 156 * m, -22 * m * h},
                                 {-13 * m * h, -3 * m * h * h, -22 * m * h, 4 * m * h * h}};
    for (std::size_t i = 0; i < 4; ++i) {
      for (std::size_t j = 0; j <= i; ++j) {
        const Index row = dofs[i].equation, column = dofs[j].equation;
        if (row < 0 || column < 0) continue;
        // Two dofs of one equation meet on its diagonal from both sides of the element matrix.
        const double twice = i != j && row == column ? 2 : 1;
        const double sign = twice * dofs[i].sign * dofs[j].sign;
        stiffness_.push_back({row, column, sign * (bending[i][j] + foundation * weight[i][j])});
        geometric_.push_back({row, column, -sign * geometric[i][j]});
        mass_.push_back({row, column, sign * mass * weight[i][j]});
      }
    }
  }

  SymmetricMatrix stiffness() const { return from_triplets(equations_, stiffness_); }
  SymmetricMatrix geometric() const { return from_triplets(equations_, geometric_); }
  SymmetricMatrix mass() const { return from_triplets(equations_, mass_); }

 private:
  Index equations_;
  std::vector<Triplet> stiffness_, geometric_, mass_;
};

/// What holds an end of a straight member.
struct EndSupport {
  bool deflection = false, rotation = false;  ///< held
};

/// A straight member of length 1 in `elements` elements.
inline BeamModel straight_member(Index elements, EndSupport low, EndSupport high, double foundation) {
  std::vector<std::array<Index, 2>> equation(static_cast<std::size_t>(elements) + 1);
  Index next = 0;
  for (Index node = 0; node <= elements; ++node) {
    const EndSupport* support = node == 0 ? &low : node == elements ? &high : nullptr;
    equation[static_cast<std::size_t>(node)] = {support != nullptr && support->deflection ? -1 : next++, -1};
    equation[static_cast<std::size_t>(node)][1] = support != nullptr && support->rotation ? -1 : next++;
  }
  BeamModel model(next);
  for (Index e = 0; e < elements; ++e) {
    const auto &a = equation[static_cast<std::size_t>(e)], &b = equation[static_cast<std::size_t>(e) + 1];
    model.add({BeamDof{a[0]}, {a[1]}, {b[0]}, {b[1]}}, 1.0 / elements, 1, foundation, 1);
  }
  return model;
}

/// A portal of two columns and a beam, all of length 1 and stiffness 1, without axial deformation; each
/// column carries the factor. `fixed`: bases held against rotation. The tops sway together; the beam bends
/// between them.
inline BeamModel portal(Index elements, bool fixed) {
  const Index inner = 2 * (elements - 1);  // equations inside a member
  const Index base = fixed ? 0 : 1;
  // Sway, rotations of the two joints, then the members one after the other.
  const Index first_column = 3, second_column = first_column + inner + base,
              beam = second_column + inner + base;
  BeamModel model(beam + inner);
  const auto column = [&](Index first, Index joint) {
    std::vector<std::array<BeamDof, 2>> nodes{{BeamDof{-1}, BeamDof{fixed ? -1 : first + inner}}};
    for (Index k = 0; k + 1 < elements; ++k)
      nodes.push_back({BeamDof{first + 2 * k}, BeamDof{first + 2 * k + 1}});
    nodes.push_back({BeamDof{0}, BeamDof{joint}});
    for (std::size_t e = 0; e + 1 < nodes.size(); ++e) {
      model.add({nodes[e][0], nodes[e][1], nodes[e + 1][0], nodes[e + 1][1]}, 1.0 / elements, 1, 0, 0);
    }
  };
  column(first_column, 1);
  column(second_column, 2);
  // A joint that turns the column's top by dw/dz turns the beam by dv/dx of the opposite sign.
  std::vector<std::array<BeamDof, 2>> nodes{{BeamDof{-1}, BeamDof{1, -1}}};
  for (Index k = 0; k + 1 < elements; ++k)
    nodes.push_back({BeamDof{beam + 2 * k}, BeamDof{beam + 2 * k + 1}});
  nodes.push_back({BeamDof{-1}, BeamDof{2, -1}});
  for (std::size_t e = 0; e + 1 < nodes.size(); ++e) {
    model.add({nodes[e][0], nodes[e][1], nodes[e + 1][0], nodes[e + 1][1]}, 1.0 / elements, 0, 0, 0);
  }
  return model;
}

}  // namespace stanchion::test
