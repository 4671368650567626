#include "io/zip_archive.hpp"

#include <algorithm>
#include <limits>

namespace stanchion {
namespace {

constexpr std::size_t kEndSize = 22, kCentralSize = 46, kLocalSize = 30, kLocatorSize = 20, kEnd64Size = 56;
constexpr std::uint64_t kIn64 = 0xffffffffU;  ///< "see the zip64 field"

/// Little-endian number of `size` bytes; the caller has checked the bounds.
std::uint64_t number(std::string_view bytes, std::size_t at, std::size_t size) {
  std::uint64_t value = 0;
  for (std::size_t i = size; i-- > 0;) value = value << 8 | static_cast<unsigned char>(bytes[at + i]);
  return value;
}

bool has(std::string_view bytes, std::uint64_t at, std::uint64_t size) {
  return at <= bytes.size() && size <= bytes.size() - at;
}

bool signed_as(std::string_view bytes, std::uint64_t at, std::uint32_t signature) {
  return has(bytes, at, 4) && number(bytes, static_cast<std::size_t>(at), 4) == signature;
}

Status damaged(const std::string& why, const std::string& path) {
  return Status::bad_input("damaged-zip", "the archive is damaged: " + why, path,
                           "write or transfer the file again");
}

struct Directory {
  std::uint64_t members = 0, size = 0, start = 0;
};

/// Finds the end record, which may be followed by a comment, and its zip64 sibling.
Status find_directory(std::string_view archive, const std::string& path, Directory& directory) {
  constexpr std::uint32_t kEnd = 0x06054b50, kEnd64 = 0x06064b50, kLocator = 0x07064b50;
  if (archive.size() < kEndSize) return damaged("it is too short", path);
  const std::size_t last = archive.size() - kEndSize;
  const std::size_t first = last > 0xffff ? last - 0xffff : 0;
  std::size_t end = last;
  while (!signed_as(archive, end, kEnd) || end + kEndSize + number(archive, end + 20, 2) > archive.size()) {
    if (end == first) return damaged("it has no directory; the file may be cut off", path);
    --end;
  }
  directory = {number(archive, end + 10, 2), number(archive, end + 12, 4), number(archive, end + 16, 4)};
  if (end >= kLocatorSize && signed_as(archive, end - kLocatorSize, kLocator)) {
    const std::uint64_t end64 = number(archive, end - kLocatorSize + 8, 8);
    if (!signed_as(archive, end64, kEnd64) || !has(archive, end64, kEnd64Size)) {
      return damaged("its zip64 record is missing", path);
    }
    const auto at = static_cast<std::size_t>(end64);
    directory = {number(archive, at + 32, 8), number(archive, at + 40, 8), number(archive, at + 48, 8)};
  }
  if (!has(archive, directory.start, directory.size))
    return damaged("its directory lies outside the file", path);
  return {};
}

/// Sizes of one member, from the fixed fields or, where those are full, the zip64 extra field.
struct Extent {
  std::uint64_t size, packed, header;
};

bool widen(std::string_view extra, Extent& extent) {
  std::size_t at = 0;
  while (extra.size() - at >= 4) {
    const std::uint64_t kind = number(extra, at, 2), length = number(extra, at + 2, 2);
    at += 4;
    if (length > extra.size() - at) return false;
    if (kind == 1) {
      std::string_view field = extra.substr(at, static_cast<std::size_t>(length));
      for (std::uint64_t* value : {&extent.size, &extent.packed, &extent.header}) {
        if (*value != kIn64) continue;
        if (field.size() < 8) return false;
        *value = number(field, 0, 8);
        field.remove_prefix(8);
      }
      return true;
    }
    at += static_cast<std::size_t>(length);
  }
  return extent.size != kIn64 && extent.packed != kIn64 && extent.header != kIn64;
}

/// One entry of the directory at `at`, which moves past it.
Status read_entry(std::string_view archive, const std::string& path, std::uint64_t& at, ZipMember& member) {
  if (!has(archive, at, kCentralSize) || !signed_as(archive, at, 0x02014b50)) {
    return damaged("a directory entry is missing", path);
  }
  const auto base = static_cast<std::size_t>(at);
  const std::uint64_t flags = number(archive, base + 8, 2), method = number(archive, base + 10, 2);
  const std::uint64_t name_size = number(archive, base + 28, 2), extra_size = number(archive, base + 30, 2);
  const std::uint64_t comment_size = number(archive, base + 32, 2);
  if (!has(archive, at + kCentralSize, name_size + extra_size + comment_size)) {
    return damaged("a directory entry is cut off", path);
  }
  member.name = archive.substr(base + kCentralSize, static_cast<std::size_t>(name_size));
  member.crc = static_cast<std::uint32_t>(number(archive, base + 16, 4));
  member.deflated = method == 8;
  if ((flags & 1) != 0 || (method != 0 && method != 8)) {
    return Status::bad_input("unsupported-zip",
                             "the archive is encrypted or uses another compression than deflate", path,
                             "save it with scipy.sparse.save_npz");
  }
  Extent extent{number(archive, base + 24, 4), number(archive, base + 20, 4), number(archive, base + 42, 4)};
  const std::string_view extra = archive.substr(base + kCentralSize + static_cast<std::size_t>(name_size),
                                                static_cast<std::size_t>(extra_size));
  if (!widen(extra, extent)) return damaged("a zip64 field is missing", path);
  at += kCentralSize + name_size + extra_size + comment_size;

  if (!has(archive, extent.header, kLocalSize) || !signed_as(archive, extent.header, 0x04034b50)) {
    return damaged("a member does not start where the directory says", path);
  }
  const auto local = static_cast<std::size_t>(extent.header);
  const std::uint64_t start =
      extent.header + kLocalSize + number(archive, local + 26, 2) + number(archive, local + 28, 2);
  if (!has(archive, start, extent.packed) || extent.size > std::uint64_t{1} << 62) {
    return damaged("a member lies outside the file", path);
  }
  if (!member.deflated && extent.size != extent.packed) return damaged("the sizes of a member differ", path);
  // Deflate cannot shrink data more than 1032-fold: a larger claim is a lie, whatever follows.
  if (member.deflated && extent.size / 1100 > extent.packed + 1)
    return damaged("a member's size is impossible", path);
  member.data = archive.substr(static_cast<std::size_t>(start), static_cast<std::size_t>(extent.packed));
  member.size = static_cast<Offset>(extent.size);
  return {};
}

}  // namespace

Result<std::vector<ZipMember>> list_zip(std::string_view archive, const std::string& path) {
  Directory directory;
  if (Status status = find_directory(archive, path, directory); !status.ok()) return status;
  std::vector<ZipMember> members;
  std::uint64_t at = directory.start;
  for (std::uint64_t i = 0; i < directory.members; ++i) {
    ZipMember member;
    if (Status status = read_entry(archive, path, at, member); !status.ok()) return status;
    members.push_back(std::move(member));
  }
  return members;
}

Status read_zip_member(const ZipMember& member, const std::string& path, const ByteSink& sink) {
  std::uint32_t crc = 0;
  if (member.deflated) {
    const Status status = inflate_raw(member.data, member.size, path, [&](std::string_view bytes) {
      crc = crc32_of(crc, bytes);
      return sink(bytes);
    });
    if (!status.ok()) return status;
  } else {
    constexpr std::size_t kPiece = std::size_t{1} << 20;
    for (std::string_view rest = member.data; !rest.empty();) {
      const std::string_view piece = rest.substr(0, kPiece);
      crc = crc32_of(crc, piece);
      if (Status status = sink(piece); !status.ok()) return status;
      rest.remove_prefix(piece.size());
    }
  }
  if (crc != member.crc) return damaged("the check sum of \"" + member.name + "\" is wrong", path);
  return {};
}

}  // namespace stanchion
