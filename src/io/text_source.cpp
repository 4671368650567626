#include "io/text_source.hpp"

#include <cstring>

#include "base/digest.hpp"
#include "io/inflate.hpp"

namespace stanchion {

Result<TextSource> TextSource::over(std::string_view bytes, const std::string& path, Offset most_bytes) {
  TextSource source;
  source.path_ = path;
  source.file_bytes_ = source.text_ = bytes;
  if (is_gzip(bytes)) {
    auto text = gunzip(bytes, most_bytes, path);
    if (!text.ok()) return text.status();
    source.decompressed_ = std::move(*text);
    source.text_ = {source.decompressed_.data(), static_cast<std::size_t>(source.decompressed_.size())};
    source.is_compressed_ = true;
  }
  if (source.text_.substr(0, 3) == "\xef\xbb\xbf") source.text_.remove_prefix(3);
  return source;
}

Result<TextSource> TextSource::open(const std::string& path, Offset most_bytes) {
  auto file = MappedFile::open(path);
  if (!file.ok()) return file.status();
  auto source = over(file->bytes(), path, most_bytes);
  if (source.ok()) source->file_ = std::move(*file);
  return source;
}

void FileDigest::compute() {
  if (hex_.empty()) hex_ = sha256(bytes_);
}

bool LineWalker::next(std::string_view& line) {
  if (rest_.empty()) return false;
  const void* found = std::memchr(rest_.data(), '\n', rest_.size());
  const std::size_t size = found != nullptr
                               ? static_cast<std::size_t>(static_cast<const char*>(found) - rest_.data())
                               : rest_.size();
  line = rest_.substr(0, size);
  rest_.remove_prefix(found != nullptr ? size + 1 : size);
  if (!line.empty() && line.back() == '\r') line.remove_suffix(1);
  ++number_;
  return true;
}

std::string_view trimmed(std::string_view text) {
  while (!text.empty() && (text.front() == ' ' || text.front() == '\t' || text.front() == '\r')) {
    text.remove_prefix(1);
  }
  while (!text.empty() && (text.back() == ' ' || text.back() == '\t' || text.back() == '\r')) {
    text.remove_suffix(1);
  }
  return text;
}

std::string lower_case(std::string_view text) {
  std::string lower(text);
  for (char& c : lower) {
    if (c >= 'A' && c <= 'Z') c = static_cast<char>(c - 'A' + 'a');
  }
  return lower;
}

std::string excerpt(std::string_view text) {
  constexpr std::size_t kLongest = 40;
  std::string shown(text.substr(0, kLongest));
  for (char& c : shown) {
    // Bytes above 126 are replaced too: a cut or invalid UTF-8 sequence would spoil a JSON document.
    if (c < ' ' || c > '~') c = '?';
  }
  if (text.size() > kLongest) shown += "...";
  return shown;
}

}  // namespace stanchion
