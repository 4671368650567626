#include "specimen/model.hpp"

namespace stanchion::specimen {
namespace {

std::optional<SymmetricMatrix> assembled(const Model& model, std::optional<PartMatrix> Part::*which) {
  std::vector<ElementGroup> groups;
  for (const Part& part : model.parts) {
    if (const auto& matrix = part.*which) {
      groups.push_back({part.nodes_per_element, part.dofs, matrix->coupling, part.nodes, matrix->fill});
    }
  }
  if (groups.empty()) return std::nullopt;
  return assemble(model.table, groups);
}

void list_unknowns(const DofTable& table, Specimen& specimen) {
  specimen.dofs.reserve(static_cast<std::size_t>(table.equations()));
  specimen.nodes.reserve(static_cast<std::size_t>(table.nodes()));
  for (Index node = 0; node < table.nodes(); ++node) {
    specimen.nodes.push_back(table.place(node));
    for (int dof = 0; dof < kDofKinds; ++dof) {
      if (table.equation(node, dof) >= 0) specimen.dofs.push_back({node + 1, static_cast<Dof>(dof)});
    }
  }
}

}  // namespace

Specimen finish(Model&& model) {
  model.table.number();
  Specimen specimen;
  if (auto stiffness = assembled(model, &Part::stiffness)) specimen.stiffness = std::move(*stiffness);
  specimen.geometric = assembled(model, &Part::geometric);
  specimen.mass = assembled(model, &Part::mass);
  for (const GroundSpring& spring : model.springs) {
    const Index equation = model.table.equation(spring.node, static_cast<int>(spring.dof));
    if (equation >= 0) add_to_diagonal(specimen.stiffness, equation, spring.stiffness);
  }
  for (const Index node : model.multiplier_nodes) {
    specimen.multipliers.push_back(model.table.equation(node, static_cast<int>(Dof::kMultiplier)));
  }
  list_unknowns(model.table, specimen);
  return specimen;
}

void add_to_diagonal(SymmetricMatrix& matrix, Index equation, double stiffness) {
  matrix.value[matrix.column_start[equation]] += stiffness;
}

double quadratic_form(const SymmetricMatrix& matrix, std::span<const double> x) {
  double sum = 0;
  for (Index column = 0; column < matrix.rows; ++column) {
    const double xc = x[static_cast<std::size_t>(column)];
    for (Offset k = matrix.column_start[column]; k < matrix.column_start[Offset{column} + 1]; ++k) {
      const double term = matrix.value[k] * xc * x[static_cast<std::size_t>(matrix.row[k])];
      sum += matrix.row[k] == column ? term : 2 * term;
    }
  }
  return sum;
}

}  // namespace stanchion::specimen
