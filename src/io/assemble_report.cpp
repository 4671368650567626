#include "io/assemble.hpp"
#include "io/place.hpp"
#include "io/shortest.hpp"

namespace stanchion {
namespace {

void report_duplicates(const RawMatrix& raw, const AssemblyFacts& facts, const std::string& path,
                       const DofMap* dofs, Warnings& warnings) {
  std::string where;
  for (const EntryPlace& place : facts.duplicate_places) {
    where += where.empty() ? "" : "; ";
    where += entry_name(place.row, place.column, dofs);
    if (!raw.lines_of) continue;
    const auto [first, second] = raw.lines_of(place);
    if (second > 0) where += " (lines " + std::to_string(first) + " and " + std::to_string(second) + ")";
  }
  const EntryPlace first = facts.duplicate_places.front();
  warnings.push_back(
      {"duplicate-entries",
       counted(facts.duplicates, "entry repeats", "entries repeat") +
           " an earlier place and was added to it, in file order: " + where +
           (facts.duplicates > static_cast<Offset>(facts.duplicate_places.size()) ? "; ..." : "") +
           ". Right for unassembled element contributions; otherwise export each place once",
       at_entry(path, first.row, first.column)});
}

void report_storage(const RawMatrix& raw, const AssemblyFacts& facts, const std::string& path,
                    Warnings& warnings) {
  const bool declared = raw.declared_symmetric;
  if (facts.storage == Storage::kUpperTriangle) {
    warnings.push_back({"upper-triangle",
                        std::string("only the upper triangle is given; it was taken for both") +
                            (declared ? " (the format asks for the lower one)" : "") +
                            ". If the matrix really is triangular, it is not a stiffness matrix",
                        path});
  } else if (facts.storage == Storage::kLowerTriangle && !declared) {
    warnings.push_back({"lower-triangle",
                        "only the lower triangle is given, in a file that does not declare symmetry; it was "
                        "taken for both. If the matrix really is triangular, it is not a stiffness matrix",
                        path});
  } else if (facts.storage == Storage::kMixedTriangle) {
    warnings.push_back(
        {"mixed-triangles",
         "entries lie in both triangles, each pair once; each was taken for both places. Check "
         "that the export did not drop half of the pairs",
         path});
  } else if (facts.storage == Storage::kBothTriangles && declared) {
    warnings.push_back(
        {"both-triangles",
         "the file declares symmetry and still gives both triangles; equal pairs were used once. "
         "Export one triangle only, or declare the matrix general",
         path});
  }
}

}  // namespace

void report_assembly(const RawMatrix& raw, const AssemblyFacts& facts, bool symmetric_part,
                     const std::string& path, const DofMap* dofs, Warnings& warnings) {
  if (facts.duplicates > 0) report_duplicates(raw, facts, path, dofs, warnings);
  report_storage(raw, facts, path, warnings);
  if (symmetric_part && facts.largest_asymmetry > 0) {
    const auto [row, column] = facts.asymmetry_place;
    warnings.push_back({"symmetric-part",
                        "the matrix is not symmetric and (A + A^T)/2 is analysed in its place; the largest "
                        "difference, " +
                            number_text(facts.largest_asymmetry) + ", is between " +
                            number_text(facts.asymmetry_lower) + " at " + entry_name(row, column, dofs) +
                            " and " + number_text(facts.asymmetry_upper) +
                            " in the mirrored place. Statements hold for the symmetric part only",
                        at_entry(path, row, column)});
  }
}

}  // namespace stanchion
