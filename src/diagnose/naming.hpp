// From evidence to entries: one function a family of directions. Each adds to `out` and counts in `nullity`.
#pragma once

#include "diagnose/evidence.hpp"

namespace stanchion {

/// Null motions of single nodes, gathered by what they are.
void name_node_motions(Evidence& evidence);

/// Constraints that repeat others, one entry a part, and those that follow from several others, another one.
void name_repeated_constraints(Evidence& evidence);

/// Zero (or weak) directions of whole parts and clusters, purified and held against the matrix.
void name_bundles(Evidence& evidence, bool weak);

/// Negative directions, or those of the structure on its constraints; sets `out.negative`.
void name_negative(Evidence& evidence);

/// Couplings that drown what their neighbours feel: one entry.
void name_stiff_couplings(Evidence& evidence);

/// The order of the entries, what is stated by the inertia and has no entry, the parts.
void account(Evidence& evidence);

}  // namespace stanchion
