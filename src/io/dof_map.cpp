#include "io/dof_map.hpp"

#include <algorithm>

#include "io/text_source.hpp"

namespace stanchion {

DofMap::DofMap() {
  for (const char* name : {"ux", "uy", "uz", "rx", "ry", "rz", "p", "t", "multiplier", "held"}) {
    number_of_name_.emplace(name, static_cast<std::uint32_t>(names_.size()));
    names_.emplace_back(name);
  }
}

std::uint32_t DofMap::intern(std::string_view dof) {
  std::string lower = lower_case(dof);
  const auto known = number_of_name_.find(lower);
  if (known != number_of_name_.end() && known->second <= kHeld) return known->second;
  const auto [at, added] =
      number_of_name_.try_emplace(std::string(dof), static_cast<std::uint32_t>(names_.size()));
  if (added) names_.emplace_back(dof);
  return at->second;
}

void DofMap::append(NodeNumber node, std::string_view dof) {
  node_.push_back(node);
  name_.push_back(intern(dof));
}

void DofMap::build_index() const {
  for (; indexed_ < equations(); ++indexed_) equations_of_node_.emplace(node(indexed_), indexed_);
}

std::optional<Index> DofMap::find(NodeNumber node, std::string_view dof) const {
  build_index();
  const std::string lower = lower_case(dof);
  const auto known = number_of_name_.find(lower);
  const auto number = known != number_of_name_.end() && known->second <= kHeld
                          ? known
                          : number_of_name_.find(std::string(dof));
  if (number == number_of_name_.end()) return std::nullopt;
  const auto [begin, end] = equations_of_node_.equal_range(node);
  std::optional<Index> found;
  for (auto at = begin; at != end; ++at) {
    const Index equation = at->second;
    if (name_[static_cast<std::size_t>(equation)] == number->second && (!found || equation < *found)) {
      found = equation;
    }
  }
  return found;
}

std::string DofMap::describe(Index equation) const {
  if (node(equation) == kNoNode) return dof(equation);
  return "node " + std::to_string(node(equation)) + ", " + dof(equation);
}

std::vector<Index> DofMap::with_name(std::uint32_t name) const {
  std::vector<Index> found;
  for (Index equation = 0; equation < equations(); ++equation) {
    if (name_[static_cast<std::size_t>(equation)] == name) found.push_back(equation);
  }
  return found;
}

std::vector<Index> DofMap::held() const {
  return with_name(kHeld);
}
std::vector<Index> DofMap::multipliers() const {
  return with_name(kMultiplier);
}

DofMap DofMap::subset(const std::vector<Index>& original) const {
  DofMap map;
  for (const Index equation : original) map.append(node(equation), dof(equation));
  return map;
}

std::string entry_name(Index row, Index column, const DofMap* dofs) {
  std::string name = "row " + std::to_string(row + 1) + ", column " + std::to_string(column + 1);
  if (dofs == nullptr || std::max(row, column) >= dofs->equations()) return name;
  if (row == column) return name + " (" + dofs->describe(row) + ")";
  return name + " (" + dofs->describe(row) + " with " + dofs->describe(column) + ")";
}

}  // namespace stanchion
