// A whole file as read-only memory.
#pragma once

#include <string>
#include <string_view>

#include "stanchion/status.hpp"

namespace stanchion {

/// Owns the mapping of one regular file. The bytes live in the page cache, not in anonymous memory.
/// Another process that shortens the file while it is mapped makes later reads fail (SIGBUS): as with every
/// mapped file, the file must not change while it is read.
class MappedFile {
 public:
  /// Maps `path` for reading from begin to end. Errors, all kBadInput: "file-not-found", "not-a-file"
  /// (directories, pipes and devices), "not-readable".
  static Result<MappedFile> open(const std::string& path);

  MappedFile() = default;
  ~MappedFile();
  MappedFile(MappedFile&& other) noexcept;
  MappedFile& operator=(MappedFile&& other) noexcept;
  MappedFile(const MappedFile&) = delete;
  MappedFile& operator=(const MappedFile&) = delete;

  std::string_view bytes() const { return {data_, size_}; }

 private:
  const char* data_ = nullptr;
  std::size_t size_ = 0;
};

}  // namespace stanchion
