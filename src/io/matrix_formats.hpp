// The readers behind read_matrix: one function a format.
#pragma once

#include <string>
#include <string_view>

#include "base/threads.hpp"
#include "io/raw_matrix.hpp"
#include "io/read_matrix.hpp"
#include "io/text_source.hpp"

namespace stanchion {

/// What every reader is given.
struct ReadTask {
  const TextSource& source;
  const MatrixReadOptions& options;
  Offset most_bytes;
  FileDigest& digest;
  ThreadPool& pool;

  const std::string& path() const { return source.path(); }
};

/// Matrix Market coordinate, real or integer, symmetric or general; an n x 1 array for a mass.
Result<RawMatrix> read_matrix_market(const ReadTask& task);

/// "row col value" lines with any separator and an optional header line.
Result<RawMatrix> read_triplet_text(const ReadTask& task, char separator);

/// "node,dof,node,dof,value" lines.
Result<RawMatrix> read_node_keyed(const ReadTask& task, char separator);

/// One value a line: a diagonal (mass only).
Result<RawMatrix> read_diagonal_text(const ReadTask& task);

/// Harwell-Boeing and Rutherford-Boeing, assembled real.
bool looks_like_boeing(std::string_view text);
Result<RawMatrix> read_boeing(const ReadTask& task);

/// SciPy sparse archive: csr, csc or coo.
Result<RawMatrix> read_npz(const ReadTask& task);

/// HDF5 group with data, indices, indptr and shape; `group` empty: the only such group of the file.
Result<RawMatrix> read_hdf5(const std::string& path, const std::string& group, Offset most_bytes,
                            const DofMap* dofs);

/// Values of a diagonal, from a body of one value a line.
Result<RawMatrix> read_diagonal_body(const ReadTask& task, std::string_view body, Offset first_line,
                                     std::optional<Offset> announced, bool whole_numbers);

/// The warning that a final line without line end may be a cut one.
void warn_unfinished_line(bool ended, const std::string& path, Warnings& warnings);

}  // namespace stanchion
