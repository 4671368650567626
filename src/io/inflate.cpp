#include "io/inflate.hpp"

#include <zlib.h>

#include <algorithm>
#include <limits>
#include <vector>

#include "model/byte_size.hpp"

namespace stanchion {
namespace {

/// zlib counts its input in 32 bits: long inputs are handed over in pieces.
constexpr std::size_t kInputPiece = std::size_t{1} << 30;
constexpr std::size_t kOutputPiece = std::size_t{1} << 18;

/// An inflate stream that ends with its scope.
class Inflater {
 public:
  explicit Inflater(int window_bits) { ready_ = inflateInit2(&stream_, window_bits) == Z_OK; }
  ~Inflater() {
    if (ready_) inflateEnd(&stream_);
  }
  Inflater(const Inflater&) = delete;
  Inflater& operator=(const Inflater&) = delete;

  bool ready() const { return ready_; }
  z_stream& stream() { return stream_; }

  /// Tops up the input from `rest`.
  void feed(std::string_view& rest) {
    if (stream_.avail_in > 0 || rest.empty()) return;
    const std::size_t size = std::min(rest.size(), kInputPiece);
    stream_.next_in = reinterpret_cast<Bytef*>(const_cast<char*>(rest.data()));
    stream_.avail_in = static_cast<uInt>(size);
    rest.remove_prefix(size);
  }

 private:
  z_stream stream_{};
  bool ready_ = false;
};

Status damaged(const char* code, const std::string& why, const std::string& path) {
  return Status::bad_input(code, "the compressed data are damaged: " + why, path,
                           "transfer or compress the file again; the original may still be whole");
}

Status out_of_memory(const std::string& path) {
  return Status::resource_limit("out-of-memory", "no memory left to decompress the file", path,
                                "use a machine with more memory");
}

Status too_large(Offset most_bytes, const std::string& path) {
  return Status::resource_limit(
      "memory-limit",
      "decompressed, the file needs more than the " + size_allowed(most_bytes) + " it may use", path,
      "decompress it to a plain file first, or raise --memory-cap");
}

/// Doubles `text` within `most_bytes`; false when it is at the limit already.
bool grow(Buffer<char>& text, Offset used, Offset most_bytes) {
  if (text.size() >= most_bytes) return false;
  Buffer<char> larger(std::min(most_bytes, std::max<Offset>(text.size() * 2, 1 << 16)));
  std::copy(text.data(), text.data() + used, larger.data());
  text = std::move(larger);
  return true;
}

/// First guess at the size of the text: what the last member's trailer says (modulo 2^32), where deflate
/// could have shrunk so much. Right for the usual single member, and then nothing is ever copied.
Offset announced_size(std::string_view bytes) {
  Offset size = 0;
  for (std::size_t i = 0; i < 4 && bytes.size() >= 18; ++i) {
    size |= Offset{static_cast<unsigned char>(bytes[bytes.size() - 4 + i])} << (8 * i);
  }
  const auto packed = static_cast<Offset>(bytes.size());
  return size <= packed * 1032 ? size + 1 : packed * 4 + 1024;
}

}  // namespace

Result<Buffer<char>> gunzip(std::string_view bytes, Offset most_bytes, const std::string& path) {
  Inflater inflater(15 + 16);
  if (!inflater.ready()) return out_of_memory(path);
  z_stream& stream = inflater.stream();
  Buffer<char> text(std::min(most_bytes, announced_size(bytes)));
  Offset used = 0;
  std::string_view rest = bytes;
  for (;;) {
    if (used == text.size() && !grow(text, used, most_bytes)) return too_large(most_bytes, path);
    inflater.feed(rest);
    const auto room = static_cast<uInt>(std::min<Offset>(text.size() - used, kInputPiece));
    stream.next_out = reinterpret_cast<Bytef*>(text.data() + used);
    stream.avail_out = room;
    const int state = inflate(&stream, Z_NO_FLUSH);
    used += room - stream.avail_out;
    if (state == Z_STREAM_END) {
      const std::size_t left = stream.avail_in + rest.size();
      const std::string_view tail = bytes.substr(bytes.size() - left);
      if (!is_gzip(tail)) break;  // padding after the last member is customary and harmless
      if (inflateReset(&stream) != Z_OK) return damaged("damaged-gzip", "a member does not start", path);
      continue;
    }
    if (state == Z_MEM_ERROR) return out_of_memory(path);
    if (state != Z_OK && state != Z_BUF_ERROR) {
      return damaged("damaged-gzip", stream.msg != nullptr ? stream.msg : "unreadable", path);
    }
    if (stream.avail_in == 0 && rest.empty() && stream.avail_out > 0) {
      return damaged("damaged-gzip", "they end too early", path);
    }
  }
  text.shrink(used);
  return text;
}

Status inflate_raw(std::string_view bytes, Offset expected_bytes, const std::string& path,
                   const ByteSink& sink) {
  Inflater inflater(-15);
  if (!inflater.ready()) return out_of_memory(path);
  z_stream& stream = inflater.stream();
  std::vector<char> piece(kOutputPiece);
  std::string_view rest = bytes;
  Offset produced = 0;
  for (;;) {
    inflater.feed(rest);
    stream.next_out = reinterpret_cast<Bytef*>(piece.data());
    stream.avail_out = static_cast<uInt>(piece.size());
    const int state = inflate(&stream, Z_NO_FLUSH);
    const std::size_t size = piece.size() - stream.avail_out;
    produced += static_cast<Offset>(size);
    if (produced > expected_bytes) return damaged("damaged-zip", "more bytes than announced", path);
    if (size > 0) {
      if (Status status = sink({piece.data(), size}); !status.ok()) return status;
    }
    if (state == Z_STREAM_END) break;
    if (state == Z_MEM_ERROR) return out_of_memory(path);
    if (state != Z_OK && state != Z_BUF_ERROR) {
      return damaged("damaged-zip", stream.msg != nullptr ? stream.msg : "unreadable", path);
    }
    if (stream.avail_in == 0 && rest.empty() && size == 0) {
      return damaged("damaged-zip", "they end too early", path);
    }
  }
  if (produced != expected_bytes) return damaged("damaged-zip", "fewer bytes than announced", path);
  return {};
}

std::uint32_t crc32_of(std::uint32_t crc, std::string_view bytes) {
  while (!bytes.empty()) {
    const std::size_t size = std::min(bytes.size(), kInputPiece);
    crc = static_cast<std::uint32_t>(
        crc32(crc, reinterpret_cast<const Bytef*>(bytes.data()), static_cast<uInt>(size)));
    bytes.remove_prefix(size);
  }
  return crc;
}

}  // namespace stanchion
