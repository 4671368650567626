// `--witness`: a vector that shows to anyone that a matrix is not positive definite, as a table.
#pragma once

#include <optional>
#include <string>

#include "stanchion/outcome.hpp"
#include "stanchion/status.hpp"

namespace stanchion::cli {

/// CSV `equation,value`, or `equation,node,dof,value` when `dofs` names a map, below a comment that states
/// x^T A x and its bound. The values read back to the same bits. Errors: those of reading the map.
Result<std::string> witness_table(const Witness& witness, const std::optional<std::string>& dofs);

}  // namespace stanchion::cli
