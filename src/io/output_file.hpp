// Files that appear whole or not at all.
#pragma once

#include <memory>
#include <string>
#include <string_view>

#include "stanchion/status.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

class DeflateStream;

/// Collects output under a temporary name in the target's folder; `commit` renames it into place. Without
/// commit the temporary file is removed, and an older file of the target's name stays as it was.
/// Failures are remembered and reported by commit: writing code need not check every call.
class OutputFile {
 public:
  /// `compress`: write gzip.
  OutputFile(std::string path, bool compress);
  ~OutputFile();
  OutputFile(const OutputFile&) = delete;
  OutputFile& operator=(const OutputFile&) = delete;

  void write(std::string_view bytes);

  /// Overwrites bytes at an earlier position of an uncompressed file.
  void write_at(Offset position, std::string_view bytes);

  /// The name to write under for libraries that open files themselves (the file exists, empty).
  const std::string& temporary_path() const { return temporary_; }

  bool ok() const { return status_.ok(); }

  /// Errors: kResourceLimit "write-failed" (disk full, quota); kBadUsage "cannot-write" (no such folder, no
  /// permission).
  Status commit();

 private:
  void flush();
  void raw_write(std::string_view bytes);

  std::string path_, temporary_, pending_;
  int file_ = -1;
  Status status_;
  std::unique_ptr<DeflateStream> deflate_;
};

/// Whether `path` ends with `extension` (given in lower case), whatever the case.
bool has_extension(const std::string& path, std::string_view extension);

}  // namespace stanchion
