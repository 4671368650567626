// NumPy arrays (NEP 1, format versions 1 to 3), read as a stream.
#pragma once

#include <functional>
#include <string>
#include <string_view>
#include <vector>

#include "io/zip_archive.hpp"
#include "stanchion/status.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

enum class NpyKind { kReal, kWhole, kUnsigned, kBytes, kText, kOther };

struct NpyHeader {
  NpyKind kind = NpyKind::kOther;
  int item_bytes = 0;
  bool big_endian = false;
  bool fortran_order = false;
  std::vector<Offset> shape;
  std::string type;  ///< as written, for messages

  Offset items() const;  ///< product of the shape; -1 on overflow
};

/// What a reader of an array is told: first the header (before memory is set aside), then the items in order,
/// always whole items.
struct NpySink {
  std::function<Status(const NpyHeader&)> begin;
  std::function<Status(Offset first_item, std::string_view items)> take;
};

/// Reads a member that is an array. Errors, kBadInput: "bad-array" and those of read_zip_member.
Status read_npy(const ZipMember& member, const std::string& path, const NpySink& sink);

/// The number that item `item` of `items` holds. Reals in half precision and beyond double are not supported
/// (see supported()).
double npy_real(const NpyHeader& header, std::string_view items, Offset item);
/// Whole numbers; unsigned ones beyond the range become the largest.
Offset npy_whole(const NpyHeader& header, std::string_view items, Offset item);
/// Whether the two functions above can read the type.
bool npy_numeric(const NpyHeader& header);

}  // namespace stanchion
