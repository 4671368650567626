#include "specimen/faults.hpp"

#include <cmath>
#include <utility>

namespace stanchion::specimen {

std::vector<Index> detach(Model& model, const ElementChoice& chosen,
                          const std::function<bool(Index node)>& kept) {
  std::vector<char> outside(static_cast<std::size_t>(model.table.nodes()), 0);
  std::vector<std::vector<char>> choice;
  for (const Part& part : model.parts) {
    auto& flags = choice.emplace_back(static_cast<std::size_t>(part.elements()), 0);
    for (Offset e = 0; e < part.elements(); ++e) {
      flags[static_cast<std::size_t>(e)] = chosen(part, e) ? 1 : 0;
      if (flags[static_cast<std::size_t>(e)]) continue;
      for (const Index node : part.element(e)) outside[static_cast<std::size_t>(node)] = 1;
    }
  }
  std::vector<Index> copy_of(outside.size(), -1), copies;
  for (std::size_t p = 0; p < model.parts.size(); ++p) {
    Part& part = model.parts[p];
    for (std::size_t k = 0; k < part.nodes.size(); ++k) {
      if (!choice[p][k / static_cast<std::size_t>(part.nodes_per_element)]) continue;
      const Index node = part.nodes[k];
      if (!outside[static_cast<std::size_t>(node)] || kept(node)) continue;
      Index& copy = copy_of[static_cast<std::size_t>(node)];
      if (copy < 0) {
        copy = model.table.add_node(model.table.place(node), model.table.dofs(node));
        copies.push_back(copy);
      }
      part.nodes[k] = copy;
    }
  }
  return copies;
}

Point centre_of(const Model& model, const Part& part, Offset element) {
  Point centre;
  for (const Index node : part.element(element)) {
    const Point& p = model.table.place(node);
    centre = {centre.x + p.x, centre.y + p.y, centre.z + p.z};
  }
  const double n = part.nodes_per_element;
  return {centre.x / n, centre.y / n, centre.z / n};
}

void hold_softly(Model& model, const std::vector<Index>& nodes, double stiffness) {
  for (const Index node : nodes) {
    for (const Dof dof : {Dof::kUx, Dof::kUy, Dof::kUz}) model.springs.push_back({node, dof, stiffness});
  }
}

void add_negative_spring(Specimen& specimen, const TrialMotion& motion) {
  std::vector<double> x(specimen.dofs.size(), 0.0);
  std::size_t largest = 0;
  double size = 0;
  for (std::size_t i = 0; i < x.size(); ++i) {
    const auto dof = static_cast<std::size_t>(specimen.dofs[i].dof);
    if (dof > static_cast<std::size_t>(Dof::kRz)) continue;
    x[i] = motion(specimen.nodes[static_cast<std::size_t>(specimen.dofs[i].node - 1)])[dof];
    if (dof <= static_cast<std::size_t>(Dof::kUz) && std::abs(x[i]) > size) {
      largest = i;
      size = std::abs(x[i]);
    }
  }
  const double energy = quadratic_form(specimen.stiffness, x);
  add_to_diagonal(specimen.stiffness, static_cast<Index>(largest), -2 * energy / (size * size));
}

ExpectedInertia inertia_in_space(const Specimen& specimen, Fault fault, const FaultWords& words) {
  switch (fault) {
    case Fault::kFree:
      return inertia_of(specimen, 0, 6, words.free);
    case Fault::kLoosePart:
      return inertia_of(specimen, 0, 6, words.loose);
    case Fault::kSoftSpring:
      return inertia_of(specimen, 0, 0,
                        words.softly_held +
                            " positive springs, however soft: positive definite, with six "
                            "very small eigenvalues");
    case Fault::kNegativeSpring:
      return inertia_of(specimen, 1, 0,
                        "a positive definite matrix changed by one negative spring (rank one) of twice the "
                        "Rayleigh quotient of " +
                            words.motion);
    default:
      return inertia_of(specimen, 0, 0, words.sound);
  }
}

ExpectedInertia inertia_of(const Specimen& specimen, Index negative, Index zero, std::string why) {
  return {negative, zero, specimen.stiffness.rows - negative - zero, std::move(why)};
}

}  // namespace stanchion::specimen
