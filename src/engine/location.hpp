// The part of a check that tells where and why: certified inertia with a kept factor, then the diagnosis.
#pragma once

#include <optional>

#include "engine/constraints.hpp"
#include "engine/model_input.hpp"
#include "engine/pipeline.hpp"
#include "engine/prepared_pencil.hpp"
#include "io/node_table.hpp"
#include "stanchion/located.hpp"

namespace stanchion {

/// What locating takes from a model before the pencil takes its matrices.
struct LocationFacts {
  std::optional<DofMap> dofs;
  std::optional<NodeTable> nodes;
  std::optional<AxesTable> axes;
  std::vector<Index> multipliers, original;
  std::optional<MassTotals> mass;
};

/// read_model, but a dof map that cannot be used is left out with a warning ("dof-map-unusable"): equations
/// are named by their numbers then.
Result<ModelInput> read_model_to_locate(const Request& request, const RunContext& context, ThreadPool& pool,
                                        Outcome& outcome);

/// Reads the table of axes (an unusable one is left out, "axes-unusable"), sums the mass up, and takes it and
/// the node table out of `model`.
LocationFacts collect_location_facts(ModelInput& model, const Request& request, Outcome& outcome);

/// Certifies by two offsets and fills outcome.located, unless the inertia is unresolved. `rank`: of
/// the constraints, which says how many negative directions multipliers bring along. Where vectors tell apart
/// what the inertia calls zero, it is certified again with a smaller offset.
Result<CertifiedInertia> certify_and_locate(PreparedPencil& pencil, const LocationFacts& facts,
                                            const Request& request, const ConstraintRank& rank,
                                            ThreadPool& pool, Outcome& outcome);

}  // namespace stanchion
