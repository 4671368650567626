// A result file that appears whole or not at all.
#pragma once

#include <cstdio>
#include <memory>
#include <string>

#include "stanchion/status.hpp"

namespace stanchion::cli {

/// Writes beside the target and takes its place on `commit`. Without a commit nothing is left behind and an
/// older file of that name stays as it was. A target that is no regular file (a device, a pipe) is written to
/// directly. Movable; not thread safe.
class OutputFile {
 public:
  /// Bad usage ("cannot-write") when no file can be made there; `option` is named as the place.
  static Result<OutputFile> open(const std::string& option, const std::string& path);
  OutputFile(OutputFile&& other) noexcept;
  OutputFile& operator=(OutputFile&& other) noexcept;
  ~OutputFile();

  /// Writes `text`, forces it to the disk and moves it into place. Resource limit ("write-failed") when the
  /// disk does not take it; the older file, if any, is then untouched.
  Status commit(const std::string& text);

 private:
  OutputFile() = default;
  void discard();

  std::FILE* stream_ = nullptr;
  std::string target_;
  std::string temporary_;  ///< empty: written to the target directly
};

}  // namespace stanchion::cli
