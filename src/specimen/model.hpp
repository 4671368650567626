// A model under construction: nodes, parts (elements of one kind), springs; turned into a Specimen at the
// end.
#pragma once

#include <functional>
#include <memory>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "specimen/assembler.hpp"
#include "specimen/dof_table.hpp"
#include "specimen/specimen.hpp"

namespace stanchion::specimen {

using Fill = std::function<void(Offset element, std::span<double> matrix)>;

/// One of the three matrices of a part.
struct PartMatrix {
  Coupling coupling{};
  Fill fill;
};

/// Elements of one kind.
struct Part {
  int nodes_per_element = 0;
  DofSet dofs = 0;
  std::vector<Index> nodes;
  std::optional<PartMatrix> stiffness, geometric, mass;

  Offset elements() const { return static_cast<Offset>(nodes.size()) / nodes_per_element; }
  std::span<const Index> element(Offset e) const {
    const auto width = static_cast<std::size_t>(nodes_per_element);
    return std::span(nodes).subspan(static_cast<std::size_t>(e) * width, width);
  }
};

/// A spring from one unknown to the ground.
struct GroundSpring {
  Index node = 0;
  Dof dof = Dof::kUx;
  double stiffness = 0;  ///< N/m
};

struct Model {
  DofTable table;
  std::vector<Part> parts;
  std::vector<GroundSpring> springs;
  std::vector<Index> multiplier_nodes;
};

/// A Fill that gives every element the same matrix.
template <class Matrix>
Fill same_for_all(const Matrix& matrix) {
  auto shared = std::make_shared<const Matrix>(matrix);
  return [shared](Offset, std::span<double> out) {
    std::copy(shared->entry.begin(), shared->entry.end(), out.begin());
  };
}

/// Numbers the equations, assembles the matrices that the parts have, adds the springs to K and lists dofs
/// and nodes. `name`, `scenario` and `expected` are left to the caller.
Specimen finish(Model&& model);

/// Adds `stiffness` to the diagonal entry of `equation`, which must exist.
void add_to_diagonal(SymmetricMatrix& matrix, Index equation, double stiffness);

/// x^T A x.
double quadratic_form(const SymmetricMatrix& matrix, std::span<const double> x);

}  // namespace stanchion::specimen
