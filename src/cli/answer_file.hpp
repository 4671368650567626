// The place where an answer is to be written, made sure of before the work starts.
#pragma once

#include <cstdio>
#include <memory>
#include <string>

#include "io/output_file.hpp"
#include "stanchion/status.hpp"

namespace stanchion::cli {

/// A file that appears whole or not at all; behind a link, the file it leads to. A device or a pipe is
/// written to directly, for it cannot be replaced.
class AnswerFile {
 public:
  /// Bad usage ("cannot-write") when nothing can be written there.
  static Result<AnswerFile> open(const std::string& path);

  /// Removes an older file of this name, so that it cannot pass for the answer of this run.
  void remove_older() const;

  /// Resource limit ("write-failed") when the disk does not take `text`; nothing then appears. Once only.
  Status commit(const std::string& text);
  bool committed() const { return committed_; }

 private:
  bool committed_ = false;
  std::string path_, target_;  ///< as typed, and behind links
  std::unique_ptr<OutputFile> file_;
  std::shared_ptr<std::FILE> device_;
};

}  // namespace stanchion::cli
