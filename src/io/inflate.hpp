// Compressed bytes, behind names of ours: the only files that know zlib are inflate.cpp and deflate.cpp.
#pragma once

#include <functional>
#include <string>
#include <string_view>

#include "base/buffer.hpp"
#include "stanchion/status.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

/// Takes the next piece of decompressed bytes; a failure stops the work and is handed on.
using ByteSink = std::function<Status(std::string_view)>;

inline bool is_gzip(std::string_view bytes) {
  return bytes.size() >= 2 && bytes[0] == '\x1f' && bytes[1] == '\x8b';
}

/// Decompresses gzip data (one member or several, as parallel compressors write) into memory.
/// Errors: "damaged-gzip" (kBadInput), "memory-limit" (kResourceLimit) when the text needs more than
/// `most_bytes`. `path` is named in messages.
Result<Buffer<char>> gunzip(std::string_view bytes, Offset most_bytes, const std::string& path);

/// Decompresses one raw deflate stream piece by piece into `sink`; `expected_bytes` must come out exactly.
/// Error: "damaged-zip" (kBadInput).
Status inflate_raw(std::string_view bytes, Offset expected_bytes, const std::string& path,
                   const ByteSink& sink);

/// CRC-32 as zip and gzip use it, continued from `crc` (0 to start).
std::uint32_t crc32_of(std::uint32_t crc, std::string_view bytes);

}  // namespace stanchion
