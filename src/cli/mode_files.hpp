// Mode shapes of bracketed values as files.
#pragma once

#include <string>

#include "stanchion/outcome.hpp"
#include "stanchion/request.hpp"
#include "stanchion/status.hpp"

namespace stanchion::cli {

/// A NumPy array (equations x modes, doubles) when `path` ends in .npy, else CSV: equation (with node and dof
/// where a map is given) and one column a mode, below one comment a mode with its value, interval, Rayleigh
/// quotient and residual. The largest entry of each mode is 1. Errors: those of reading the map.
Result<std::string> mode_table(const BracketOutcome& bracket, const InputRequest& input,
                               const std::string& path);

/// An unstructured grid of the nodes (VTK XML, ascii) with the displacements of every mode in global
/// directions. Bad usage when nodes or dofs are not known. Errors: those of reading the tables.
Result<std::string> mode_grid(const BracketOutcome& bracket, const InputRequest& input);

}  // namespace stanchion::cli
