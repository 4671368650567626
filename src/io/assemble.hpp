// From entries in file order to a checked symmetric matrix.
#pragma once

#include <string>
#include <vector>

#include "base/threads.hpp"
#include "io/raw_matrix.hpp"
#include "sparse/symmetric_matrix.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// How the two triangles were stored.
enum class Storage {
  kDiagonal,  ///< no entry off the diagonal
  kLowerTriangle,
  kUpperTriangle,
  kMixedTriangle,  ///< declared symmetric, each pair stored once, some in either triangle
  kBothTriangles,
};

/// What was seen while the entries were put together.
struct AssemblyFacts {
  Offset entries_read = 0;
  Storage storage = Storage::kDiagonal;
  Offset duplicates = 0;                            ///< entries added to an earlier one of the same place
  std::vector<EntryPlace> duplicate_places;         ///< the first few, by column
  double largest_asymmetry = 0;                     ///< largest |a_ij - a_ji|
  EntryPlace asymmetry_place;                       ///< where (i > j)
  double asymmetry_lower = 0, asymmetry_upper = 0;  ///< a_ij and a_ji there
};

/// Sorts `raw` into compressed columns, sums duplicates in file order, and joins the two triangles:
/// declared symmetric, or only one triangle present: that triangle stands for both;
/// both present: they must be equal, an absent entry counting as zero unless symmetry is declared. With
/// `symmetric_part` unequal pairs are replaced by their mean. Consumes `raw.entries`.
/// Memory while it works: the entries' columns, rows and values once, and one copy of rows and values
/// (24 bytes an entry with the result, for up to 2^32 entries); nothing extra when the file is sorted by
/// column. Errors: kBadInput "asymmetric" (place: the entry), "sum-overflows". Same bits for every number of
/// threads.
/// Messages name nodes and dofs by `dofs`, which may be null.
Result<SymmetricMatrix> assemble(RawMatrix& raw, bool symmetric_part, const std::string& path,
                                 const DofMap* dofs, ThreadPool& pool, AssemblyFacts& facts);

/// Warnings for what assemble found and could resolve, with remedies and lines where the file has lines.
void report_assembly(const RawMatrix& raw, const AssemblyFacts& facts, bool symmetric_part,
                     const std::string& path, const DofMap* dofs, Warnings& warnings);

}  // namespace stanchion
