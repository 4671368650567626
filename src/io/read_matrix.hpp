// Files to a checked symmetric matrix: the one entrance for every matrix format.
#pragma once

#include <optional>
#include <string>
#include <string_view>

#include "base/threads.hpp"
#include "io/assemble.hpp"
#include "io/dof_map.hpp"
#include "sparse/symmetric_matrix.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

enum class MatrixRole {
  kStiffness,
  kSecond,  ///< geometric stiffness, or a matrix that is added
  kMass,    ///< may also be a vector of diagonal entries
};

struct MatrixReadOptions {
  MatrixRole role = MatrixRole::kStiffness;
  bool symmetric_part = false;               ///< take (A + A^T)/2 where the triangles differ
  std::optional<int> base;                   ///< 0 or 1; triplet text only
  std::optional<Index> rows;                 ///< triplet text only, for empty last rows
  const DofMap* dofs = nullptr;              ///< numbers node-keyed triplets; not owned
  std::optional<Offset> memory_limit_bytes;  ///< absent: nine tenths of this machine's memory
};

struct MatrixFile {
  SymmetricMatrix matrix;
  Warnings warnings;           ///< what was resolved on the way: duplicates, storage, base, header
  std::string sha256;          ///< of the file itself, as it lies on disk
  std::string format;          ///< in words
  std::optional<DofMap> dofs;  ///< node-keyed files without a given map: the numbering that was chosen
  AssemblyFacts facts;         ///< entries read, storage, duplicates, asymmetry
};

/// Reads the matrix in `path` (for HDF5 also `FILE:/group`); the format is found from the content.
/// Errors are kBadInput with file and line or entry and a remedy; "memory-limit" and "out-of-memory" are
/// kResourceLimit. The result holds check_invariants(), and is bit for bit the same for any number of
/// threads. Cost: one pass over the file and one over the entries; anonymous memory: the matrix and one
/// working copy (24 bytes an entry of the file; .gz also the text). Not to be called from inside a piece of
/// `pool` work.
Result<MatrixFile> read_matrix(const std::string& path, const MatrixReadOptions& options, ThreadPool& pool);

/// The same for text or zip bytes in memory; `path` only names them in messages. HDF5 is refused here.
Result<MatrixFile> read_matrix_bytes(std::string_view bytes, const std::string& path,
                                     const MatrixReadOptions& options, ThreadPool& pool);

/// kBadInput "size-mismatch" unless the two matrices have the same number of rows. For the second matrix of a
/// pencil and for every added one.
Status check_same_size(const SymmetricMatrix& stiffness, const std::string& stiffness_path,
                       const SymmetricMatrix& other, const std::string& other_path);

}  // namespace stanchion
