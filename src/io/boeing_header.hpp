// The header of Harwell-Boeing and Rutherford-Boeing files.
#pragma once

#include <string>
#include <string_view>

#include "io/fortran_format.hpp"
#include "io/text_source.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// What the first four or five lines say of an assembled real matrix.
struct BoeingHeader {
  Offset pointer_lines = 0, index_lines = 0, value_lines = 0, right_side_lines = 0;
  std::string type;
  Offset rows = 0, columns = 0, entries = 0;
  FortranFormat pointers, indices, values;
};

/// Reads the header from the start of a file; `walker` then stands before the column pointers.
/// Errors, kBadInput with file:line: "bad-header", "bad-format", "truncated-file", and the kinds of matrix
/// that are not read, by name ("unassembled-matrix", "pattern-matrix", "complex-matrix", "skew-symmetric",
/// "hermitian-matrix", "not-square", "empty-matrix", "too-many-rows").
Result<BoeingHeader> read_boeing_header(LineWalker& walker, const std::string& path);

/// "truncated-file" at the line `walker` gave last.
Status boeing_truncated(const LineWalker& walker, const std::string& path);

}  // namespace stanchion
