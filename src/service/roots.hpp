// Folders of the server from which requests may name files, and nothing outside of them.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "base/file_handle.hpp"
#include "stanchion/status.hpp"

namespace stanchion::service {

struct FileEntry {
  std::string name, path;  ///< path as a request names it
  bool is_folder = false;
  std::optional<std::int64_t> bytes, modified_ms;
};

struct FileListing {
  std::string path;
  std::optional<std::string> parent;
  std::vector<FileEntry> entries;
  bool truncated = false;
};

struct OpenedFile {
  FileHandle handle;
  std::int64_t bytes = 0;
};

/// Immutable after its making, thread safe.
class Roots {
 public:
  /// Each text is DIR or NAME=DIR; a name has letters, digits, _ and -. Bad usage "bad-root".
  static Result<Roots> open(const std::vector<std::string>& texts);

  std::vector<std::string> names() const;

  /// "ROOT/rest" for the path of a file under a root, also when it was given as an absolute one. Lexical
  /// only; bad input "outside-roots" when it names no root.
  Result<std::string> name_of(const std::string& path) const;

  /// Opens the regular file `name` ("ROOT/rest"). Links are followed as long as they stay below the root; the
  /// kernel checks it while it opens, so that nobody can exchange a folder in between. Bad input
  /// "file-not-found", "outside-roots", "not-a-file", "cannot-read".
  Result<OpenedFile> open_file(const std::string& name) const;

  /// Folders first, by name; an empty path lists the roots. What lies outside behind a link and names that
  /// begin with a dot are left out. The same errors, and "not-a-folder".
  Result<FileListing> list(const std::string& path, std::size_t most) const;

 private:
  struct Root {
    std::string name, folder;
    FileHandle handle;
  };
  Result<FileHandle> open_below(const std::string& name, int flags) const;

  std::vector<Root> roots_;
};

}  // namespace stanchion::service
