// From data, indices, indptr to entries: what .npz and HDF5 have in common.
#pragma once

#include <string>

#include "io/raw_matrix.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// Largest whole number that every smaller one shares exactly with a double.
inline constexpr Offset kExactInDouble = Offset{1} << 53;

/// kBadInput "not-square", "empty-matrix", "too-many-rows" unless rows x columns suits a stiffness matrix.
Status check_shape(Offset rows, Offset columns, const std::string& path);

/// "bad-pointers" unless `pointers` (rows + 1 of them) rise from 0 to `entries`.
Status check_row_pointers(const Buffer<Offset>& pointers, Offset entries, const std::string& path);

/// Fills `entries`, whose `row` holds the index of each entry as the file has it, from the pointers; these
/// are by rows, or `by_columns`. "index-out-of-range" and "not-finite" name the entry
/// (by node and dof where `dofs` is not null).
Status spread_rows(const Buffer<Offset>& pointers, Index rows, bool by_columns, EntryList& entries,
                   const std::string& path, const DofMap* dofs);

/// The same checks for entries given one by one: `row` and `column` hold the file's indices.
Status fold_entries(Index rows, EntryList& entries, const std::string& path, const DofMap* dofs);

}  // namespace stanchion
