#include "io/npy.hpp"

#include <algorithm>
#include <cstdint>
#include <cstring>
#include <limits>

#include "base/checked.hpp"
#include "io/number.hpp"
#include "io/text_source.hpp"

namespace stanchion {
namespace {

constexpr std::size_t kLongestHeader = std::size_t{1} << 16;

Status bad_array(const std::string& member, const std::string& why, const std::string& path) {
  return Status::bad_input("bad-array", "the array \"" + excerpt(member) + "\" cannot be read: " + why, path,
                           "save the matrix again with scipy.sparse.save_npz");
}

/// Text after 'key': in the header, which is a Python dictionary.
std::string_view value_of(std::string_view dictionary, std::string_view key) {
  for (const char quote : {'\'', '"'}) {
    const std::string name = quote + std::string(key) + quote;
    const std::size_t at = dictionary.find(name);
    if (at == std::string_view::npos) continue;
    std::string_view rest = trimmed(dictionary.substr(at + name.size()));
    if (rest.empty() || rest.front() != ':') continue;
    return trimmed(rest.substr(1));
  }
  return {};
}

bool parse_type(std::string_view text, NpyHeader& header) {
  if (text.size() < 4 || (text.front() != '\'' && text.front() != '"')) return false;
  const std::size_t end = text.find(text.front(), 1);
  if (end == std::string_view::npos || end < 3) return false;
  text = text.substr(1, end - 1);
  header.type = excerpt(text);
  header.big_endian = text.front() == '>';
  switch (text[1]) {
    case 'f':
      header.kind = NpyKind::kReal;
      break;
    case 'i':
      header.kind = NpyKind::kWhole;
      break;
    case 'u':
      header.kind = NpyKind::kUnsigned;
      break;
    case 'S':
      header.kind = NpyKind::kBytes;
      break;
    case 'U':
      header.kind = NpyKind::kText;
      break;
    default:
      header.kind = NpyKind::kOther;
  }
  const std::string_view size = text.substr(2);
  const char* p = size.data();
  Offset bytes = 0;
  if (scan_whole(p, p + size.size(), bytes) != NumberFault::kNone || bytes < 0 || bytes > 1024) return false;
  header.item_bytes = static_cast<int>(header.kind == NpyKind::kText ? 4 * bytes : bytes);
  return header.item_bytes > 0;
}

bool parse_shape(std::string_view text, NpyHeader& header) {
  if (text.empty() || text.front() != '(') return false;
  const std::size_t end = text.find(')');
  if (end == std::string_view::npos) return false;
  text = text.substr(1, end - 1);
  const char* p = text.data();
  const char* const stop = p + text.size();
  while ((p = skip_blanks(p, stop)) != stop) {
    Offset extent = 0;
    if (scan_whole(p, stop, extent) != NumberFault::kNone || extent < 0 || header.shape.size() > 8)
      return false;
    header.shape.push_back(extent);
    p = skip_blanks(p, stop);
    if (p != stop && *p == ',') ++p;
  }
  return true;
}

/// Collects the start of the member until the header is complete, then passes items on.
class NpyStream {
 public:
  NpyStream(const ZipMember& member, const std::string& path, const NpySink& sink)
      : member_(member), path_(path), sink_(sink) {}

  Status take(std::string_view bytes) {
    if (!begun_) {
      start_ += bytes;
      bytes = {};
      if (Status status = try_begin(); !status.ok() || !begun_) return status;
      bytes = start_;
      bytes.remove_prefix(header_size_);
    }
    return pass_items(bytes);
  }

  Status end() const {
    if (!begun_) return bad_array(member_.name, "it ends too early", path_);
    if (!rest_.empty() || item_ != header_.items())
      return bad_array(member_.name, "items are missing", path_);
    return {};
  }

 private:
  Status try_begin() {
    if (start_.size() < 12) return {};
    if (start_.compare(0, 6, "\x93NUMPY") != 0) return bad_array(member_.name, "it is no NumPy array", path_);
    const auto byte = [this](std::size_t at) {
      return static_cast<std::size_t>(static_cast<unsigned char>(start_[at]));
    };
    const std::size_t version = byte(6), prefix = version == 1 ? 10 : 12;
    if (version < 1 || version > 3) return bad_array(member_.name, "its version is unknown", path_);
    std::size_t length = byte(8) | byte(9) << 8;
    if (version > 1) length |= byte(10) << 16 | byte(11) << 24;
    if (length > kLongestHeader) return bad_array(member_.name, "its header is too long", path_);
    header_size_ = prefix + length;
    if (start_.size() < header_size_) return {};
    const std::string_view dictionary = std::string_view(start_).substr(prefix, length);
    header_.fortran_order = value_of(dictionary, "fortran_order").substr(0, 4) == "True";
    if (!parse_type(value_of(dictionary, "descr"), header_) ||
        !parse_shape(value_of(dictionary, "shape"), header_)) {
      return bad_array(member_.name, "its header is not understood", path_);
    }
    const auto bytes = checked_product(header_.items(), header_.item_bytes);
    if (header_.items() < 0 || !bytes || *bytes != member_.size - static_cast<Offset>(header_size_)) {
      return bad_array(member_.name, "its size does not match its shape", path_);
    }
    begun_ = true;
    return sink_.begin(header_);
  }

  Status pass_items(std::string_view bytes) {
    const auto item = static_cast<std::size_t>(header_.item_bytes);
    if (!rest_.empty()) {
      const std::size_t taken = std::min(bytes.size(), item - rest_.size());
      rest_ += bytes.substr(0, taken);
      bytes.remove_prefix(taken);
      if (rest_.size() < item) return {};
      if (Status status = sink_.take(item_++, rest_); !status.ok()) return status;
      rest_.clear();
    }
    const std::size_t whole = bytes.size() / item * item;
    if (whole > 0) {
      if (Status status = sink_.take(item_, bytes.substr(0, whole)); !status.ok()) return status;
      item_ += static_cast<Offset>(whole / item);
    }
    rest_ = bytes.substr(whole);
    return {};
  }

  const ZipMember& member_;
  const std::string& path_;
  const NpySink& sink_;
  NpyHeader header_;
  std::string start_, rest_;
  std::size_t header_size_ = 0;
  Offset item_ = 0;
  bool begun_ = false;
};

/// Bytes of one item as an unsigned number.
std::uint64_t bits_of(const NpyHeader& header, std::string_view items, Offset item) {
  const auto size = static_cast<std::size_t>(header.item_bytes);
  unsigned char bytes[8] = {};
  std::memcpy(bytes, items.data() + static_cast<std::size_t>(item) * size, size);
  if (header.big_endian) std::reverse(bytes, bytes + size);
  std::uint64_t bits = 0;
  std::memcpy(&bits, bytes, sizeof bits);
  return bits;
}

}  // namespace

Offset NpyHeader::items() const {
  Offset count = 1;
  for (const Offset extent : shape) {
    const auto product = checked_product(count, extent);
    if (!product) return -1;
    count = *product;
  }
  return count;
}

Status read_npy(const ZipMember& member, const std::string& path, const NpySink& sink) {
  NpyStream stream(member, path, sink);
  const Status status =
      read_zip_member(member, path, [&stream](std::string_view bytes) { return stream.take(bytes); });
  return status.ok() ? stream.end() : status;
}

bool npy_numeric(const NpyHeader& header) {
  const int size = header.item_bytes;
  if (header.kind == NpyKind::kReal) return size == 4 || size == 8;
  const bool whole = header.kind == NpyKind::kWhole || header.kind == NpyKind::kUnsigned;
  return whole && (size == 1 || size == 2 || size == 4 || size == 8);
}

double npy_real(const NpyHeader& header, std::string_view items, Offset item) {
  const std::uint64_t bits = bits_of(header, items, item);
  if (header.item_bytes == 8) {
    double value = 0;
    std::memcpy(&value, &bits, sizeof value);
    return value;
  }
  const auto low = static_cast<std::uint32_t>(bits);
  float value = 0;
  std::memcpy(&value, &low, sizeof value);
  return static_cast<double>(value);
}

Offset npy_whole(const NpyHeader& header, std::string_view items, Offset item) {
  const std::uint64_t bits = bits_of(header, items, item);
  if (header.kind == NpyKind::kUnsigned) {
    constexpr auto kMost = static_cast<std::uint64_t>(std::numeric_limits<Offset>::max());
    return static_cast<Offset>(std::min(bits, kMost));
  }
  const int unused = 64 - 8 * header.item_bytes;
  return static_cast<Offset>(bits << unused) >> unused;  // brings the sign down
}

}  // namespace stanchion
