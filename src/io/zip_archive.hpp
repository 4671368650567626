// The members of a zip archive in memory (PKWARE APPNOTE 6.3; stored and deflated members, zip64).
#pragma once

#include <string>
#include <string_view>
#include <vector>

#include "io/inflate.hpp"
#include "stanchion/status.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

struct ZipMember {
  std::string name;
  std::string_view data;  ///< as stored, into the archive's bytes
  Offset size = 0;        ///< decompressed, as announced
  std::uint32_t crc = 0;
  bool deflated = false;
};

/// Lists the members by the central directory; sizes are checked against the archive's bounds.
/// Errors, kBadInput: "damaged-zip", "unsupported-zip" (encrypted, split, other compression).
Result<std::vector<ZipMember>> list_zip(std::string_view archive, const std::string& path);

/// Hands the member's bytes to `sink` piece by piece, at most its announced size; checks size and CRC.
Status read_zip_member(const ZipMember& member, const std::string& path, const ByteSink& sink);

}  // namespace stanchion
