// `stanchion convert IN OUT`.
#pragma once

#include <string>

#include "base/threads.hpp"
#include "io/read_matrix.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

struct ConvertOptions {
  MatrixReadOptions read;
  std::string dofs_out;  ///< where to write the numbering of a node-keyed file; empty: nowhere
};

/// What a conversion did, for the report to the user.
struct Converted {
  std::string from_format;
  Index rows = 0;
  Offset entries = 0;  ///< of the lower triangle
  Warnings warnings;   ///< of reading; and "numbering-lost" when a node-keyed numbering was written nowhere
};

/// Reads `in` in whatever format and writes it in the format that the name `out` asks for (see write_matrix).
/// Values keep their bits. Refused before reading when the name of `out` says no format. `out` appears whole
/// or not at all; it may be the same file as `in`. Errors: those of read_matrix and write_matrix.
Result<Converted> convert(const std::string& in, const std::string& out, const ConvertOptions& options,
                          ThreadPool& pool);

}  // namespace stanchion
