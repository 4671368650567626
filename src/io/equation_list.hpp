// Lists of equations: `--fix` and `--multipliers`.
#pragma once

#include <string>
#include <vector>

#include "io/dof_map.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// Reads one equation a line (from 1), or `node,dof` through `dofs`; header line optional; plain or .gz.
/// Gives equations from 0, ascending, each once (repetitions are dropped with a warning "repeated-equation").
/// `rows` is the size of the matrix, `dofs` may be null. Errors, kBadInput with file:line: those of reading
/// CSV, "bad-number", "index-out-of-range", "unknown-dof", "no-dof-map", "empty-file".
Result<std::vector<Index>> read_equation_list(const std::string& path, Index rows, const DofMap* dofs,
                                              Warnings& warnings);

/// Writes equations (given from 0) one a line, from 1, with a header line.
Status write_equation_list(const std::vector<Index>& equations, const std::string& path);

}  // namespace stanchion
