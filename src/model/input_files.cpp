#include "model/input_files.hpp"

#include <algorithm>

#include <utility>

namespace stanchion {

std::vector<InputFile> input_files(const InputRequest& input) {
  std::vector<InputFile> files{{"stiffness", input.stiffness, true}};
  for (const AddedMatrix& added : input.added) files.push_back({"added", added.path, true});
  InputRequest names = input;
  for (const auto& [role, matrix] :
       {std::pair{"geometric", true}, std::pair{"mass", true}, std::pair{"dofs", false},
        std::pair{"nodes", false}, std::pair{"axes", false}, std::pair{"fix", false},
        std::pair{"multipliers", false}}) {
    const auto& path = *file_of_role(names, role);
    if (path) files.push_back({role, *path, matrix});
  }
  return files;
}

std::optional<std::string>* file_of_role(InputRequest& input, std::string_view role) {
  if (role == "geometric") return &input.geometric;
  if (role == "mass") return &input.mass;
  if (role == "dofs") return &input.dofs;
  if (role == "nodes") return &input.nodes;
  if (role == "axes") return &input.axes;
  if (role == "fix") return &input.fix;
  if (role == "multipliers") return &input.multipliers;
  return nullptr;
}

bool has_matrix(const Outcome& outcome, std::string_view role) {
  return std::any_of(outcome.inputs.begin(), outcome.inputs.end(),
                     [&](const InputRecord& input) { return input.role == role; });
}

}  // namespace stanchion
