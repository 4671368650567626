// Reads everything a request names: matrices, maps, equation lists; checks it; strikes what is fixed or held.
#pragma once

#include <optional>
#include <vector>

#include "base/threads.hpp"
#include "engine/pipeline.hpp"
#include "io/dof_map.hpp"
#include "io/node_table.hpp"
#include "sparse/symmetric_matrix.hpp"

namespace stanchion {

/// The model as it will be analysed: struck equations are gone from every member.
struct ModelInput {
  SymmetricMatrix stiffness;
  std::vector<SymmetricMatrix> added;     ///< in the order of the request
  std::optional<SymmetricMatrix> second;  ///< geometric stiffness or mass
  std::optional<DofMap> dofs;
  std::vector<Index> multipliers;  ///< equations, ascending
  std::optional<NodeTable> nodes;  ///< of --nodes, if it could be read
  std::vector<Index>
      original;  ///< equation number in the files of every equation kept; empty: nothing struck
};

/// Fills `outcome`'s inputs, warnings, rows and read time. Errors: bad input with file, line or entry and
/// remedy. Cost: one pass over the files and two over the entries.
Result<ModelInput> read_model(const Request& request, const RunContext& context, ThreadPool& pool,
                              Outcome& outcome);

}  // namespace stanchion
