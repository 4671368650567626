// The small files that go with a specimen's matrices, as text; writing them to disk is the caller's affair.
#pragma once

#include <string>

#include "specimen/specimen.hpp"

namespace stanchion {

/// dofs.csv: `equation,node,dof`, equations and nodes from 1.
std::string dofs_csv(const Specimen& specimen);

/// nodes.csv: `node,x,y,z`, m; every coordinate reads back as the same double.
std::string nodes_csv(const Specimen& specimen);

/// multipliers.txt: the header `equation`, then one equation a line, from 1. Empty when there are none.
std::string multipliers_text(const Specimen& specimen);

/// expected.json: what is known of the specimen and why; JSON, two spaces of indent, ending in a newline.
std::string expected_json(const Specimen& specimen);

}  // namespace stanchion
