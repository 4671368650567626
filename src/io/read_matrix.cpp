#include "io/read_matrix.hpp"

#include <unistd.h>

#include <new>

#include "io/detect.hpp"
#include "io/matrix_formats.hpp"
#include "io/place.hpp"

namespace stanchion {
namespace {

Offset memory_limit(const MatrixReadOptions& options) {
  if (options.memory_limit_bytes) return *options.memory_limit_bytes;
  const Offset machine = Offset{::sysconf(_SC_PHYS_PAGES)} * Offset{::sysconf(_SC_PAGESIZE)};
  return machine / 10 * 9;
}

Status check_options(const MatrixReadOptions& options) {
  if (options.base && *options.base != 0 && *options.base != 1) {
    return Status::bad_usage("bad-base", "--base must be 0 or 1", {}, "name the number of the first row");
  }
  if (options.rows && *options.rows < 1) {
    return Status::bad_usage("bad-rows", "--rows must be at least 1", {}, "name the number of equations");
  }
  return {};
}

Result<RawMatrix> read_raw(const ReadTask& task) {
  const Detected found = detect_format(task.source.text());
  switch (found.format) {
    case FileFormat::kMatrixMarket:
      return read_matrix_market(task);
    case FileFormat::kBoeing:
      return read_boeing(task);
    case FileFormat::kZip:
      return read_npz(task);
    case FileFormat::kTriplets:
      return read_triplet_text(task, found.separator);
    case FileFormat::kNodeKeyed:
      return read_node_keyed(task, found.separator);
    case FileFormat::kOneColumn:
      return read_diagonal_text(task);
    case FileFormat::kHdf5:
      return Status::bad_input("compressed-hdf5", "an HDF5 file must be read from disk as it is", task.path(),
                               "decompress it first");
    case FileFormat::kUnknown:
      break;
  }
  return Status::bad_input(found.code, found.message,
                           found.line > 0 ? at_line(task.path(), found.line) : task.path(), found.remedy);
}

Result<MatrixFile> finish(RawMatrix& raw, const std::string& path, const MatrixReadOptions& options,
                          FileDigest& digest, ThreadPool& pool) {
  MatrixFile file;
  const DofMap* dofs = raw.dofs ? &*raw.dofs : options.dofs;
  auto matrix = assemble(raw, options.symmetric_part, path, dofs, pool, file.facts);
  if (!matrix.ok()) return matrix.status();
  file.matrix = std::move(*matrix);
  file.warnings = std::move(raw.warnings);
  report_assembly(raw, file.facts, options.symmetric_part, path, dofs, file.warnings);
  file.sha256 = digest.hex();
  file.format = std::move(raw.format);
  file.dofs = std::move(raw.dofs);
  return file;
}

Result<MatrixFile> read_source(const TextSource& source, const MatrixReadOptions& options, ThreadPool& pool) {
  FileDigest digest(source.file_bytes());
  const Offset limit =
      memory_limit(options) - (source.compressed() ? static_cast<Offset>(source.text().size()) : 0);
  const ReadTask task{source, options, limit, digest, pool};
  auto raw = read_raw(task);
  if (!raw.ok()) return raw.status();
  if (source.compressed()) raw->format += ", gzip";
  return finish(*raw, source.path(), options, digest, pool);
}

Result<MatrixFile> read_hdf5_file(const std::string& file, const std::string& group,
                                  const MatrixReadOptions& options, ThreadPool& pool) {
  auto mapped = MappedFile::open(file);
  if (!mapped.ok()) return mapped.status();
  if (!is_hdf5(mapped->bytes())) {
    return Status::bad_input("not-hdf5", "a group is named, and the file is not in HDF5 format", file,
                             "leave the group out");
  }
  auto raw = read_hdf5(file, group, memory_limit(options), options.dofs);
  if (!raw.ok()) return raw.status();
  FileDigest digest(mapped->bytes());
  return finish(*raw, group.empty() ? file : file + ":" + group, options, digest, pool);
}

/// "FILE:/group" names a group unless a file of that whole name exists.
std::size_t group_start(const std::string& path) {
  const std::size_t colon = path.rfind(":/");
  if (colon == std::string::npos || colon == 0 || ::access(path.c_str(), F_OK) == 0) return std::string::npos;
  return ::access(path.substr(0, colon).c_str(), F_OK) == 0 ? colon : std::string::npos;
}

Result<MatrixFile> out_of_memory(const std::string& path) {
  return Status::resource_limit("out-of-memory", "no memory left to read the matrix", path,
                                "use a machine with more memory, or close other programs");
}

}  // namespace

Result<MatrixFile> read_matrix(const std::string& path, const MatrixReadOptions& options, ThreadPool& pool) {
  if (Status status = check_options(options); !status.ok()) return status;
  try {
    if (const std::size_t colon = group_start(path); colon != std::string::npos) {
      return read_hdf5_file(path.substr(0, colon), path.substr(colon + 1), options, pool);
    }
    auto source = TextSource::open(path, memory_limit(options));
    if (!source.ok()) return source.status();
    if (!source->compressed() && is_hdf5(source->text())) return read_hdf5_file(path, {}, options, pool);
    return read_source(*source, options, pool);
  } catch (const std::bad_alloc&) {
    return out_of_memory(path);
  }
}

Result<MatrixFile> read_matrix_bytes(std::string_view bytes, const std::string& path,
                                     const MatrixReadOptions& options, ThreadPool& pool) {
  if (Status status = check_options(options); !status.ok()) return status;
  try {
    auto source = TextSource::over(bytes, path, memory_limit(options));
    if (!source.ok()) return source.status();
    return read_source(*source, options, pool);
  } catch (const std::bad_alloc&) {
    return out_of_memory(path);
  }
}

Status check_same_size(const SymmetricMatrix& stiffness, const std::string& stiffness_path,
                       const SymmetricMatrix& other, const std::string& other_path) {
  if (stiffness.rows == other.rows) return {};
  return Status::bad_input(
      "size-mismatch",
      stiffness_path + " has " + std::to_string(stiffness.rows) + " rows, " + other_path + " has " +
          std::to_string(other.rows),
      other_path,
      "export both from the same model with the same dofs held; for triplet text with empty "
      "last rows give --rows");
}

}  // namespace stanchion
