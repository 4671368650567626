// Every file that a request names, each with its role.
#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "stanchion/outcome.hpp"
#include "stanchion/request.hpp"

namespace stanchion {

struct InputFile {
  std::string role;  ///< "stiffness", "added", or that of file_of_role
  std::string path;
  bool matrix = false;  ///< the engine reports its digest itself
};

/// The files of `input`: the matrices in the order in which the engine reads them, then the others.
std::vector<InputFile> input_files(const InputRequest& input);

/// The member for "geometric", "mass", "dofs", "nodes", "axes", "fix" or "multipliers"; null for other roles.
std::optional<std::string>* file_of_role(InputRequest& input, std::string_view role);

/// Whether a matrix of this role ("geometric", "mass", ...) was read.
bool has_matrix(const Outcome& outcome, std::string_view role);

}  // namespace stanchion
