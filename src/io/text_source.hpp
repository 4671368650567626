// The bytes of an input file, decompressed when it is a .gz, with the fingerprint of the file itself.
#pragma once

#include <string>
#include <string_view>

#include "base/buffer.hpp"
#include "base/mapped_file.hpp"
#include "stanchion/status.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

/// One opened input file. A byte order mark at the start is passed over.
class TextSource {
 public:
  /// Errors: those of MappedFile::open and gunzip. Plain files stay mapped; .gz are decompressed into memory,
  /// at most `most_bytes`.
  static Result<TextSource> open(const std::string& path, Offset most_bytes);

  /// The same over bytes that stay the caller's (tests, fuzzing).
  static Result<TextSource> over(std::string_view bytes, const std::string& path, Offset most_bytes);

  const std::string& path() const { return path_; }
  std::string_view file_bytes() const { return file_bytes_; }
  std::string_view text() const { return text_; }
  bool compressed() const { return is_compressed_; }

 private:
  std::string path_;
  MappedFile file_;
  Buffer<char> decompressed_;
  std::string_view file_bytes_, text_;
  bool is_compressed_ = false;
};

/// SHA-256 of a file, computed once, wherever time is cheapest.
class FileDigest {
 public:
  explicit FileDigest(std::string_view bytes) : bytes_(bytes) {}
  void compute();
  const std::string& hex() {
    compute();
    return hex_;
  }

 private:
  std::string_view bytes_;
  std::string hex_;
};

/// Walks the lines of a text, counting from 1. The line end (LF or CR LF) is not part of a line.
class LineWalker {
 public:
  explicit LineWalker(std::string_view text, Offset first_line = 1) : rest_(text), number_(first_line - 1) {}

  /// False at the end of the text.
  bool next(std::string_view& line);

  Offset number() const { return number_; }        ///< of the line last given
  std::string_view rest() const { return rest_; }  ///< what follows it

 private:
  std::string_view rest_;
  Offset number_;
};

std::string_view trimmed(std::string_view text);
std::string lower_case(std::string_view text);

/// A short printable excerpt of file content for a message: control characters replaced, at most 40 long.
std::string excerpt(std::string_view text);

}  // namespace stanchion
