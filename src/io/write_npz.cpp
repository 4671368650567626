// A SciPy sparse archive: csr of the whole matrix, members stored without compression.
#include <cstring>
#include <vector>

#include "io/inflate.hpp"
#include "io/write_formats.hpp"

namespace stanchion {
namespace {

void append_little(std::string& text, std::uint64_t value, int bytes) {
  for (int i = 0; i < bytes; ++i) text.push_back(static_cast<char>(value >> (8 * i) & 0xff));
}

/// Header of a version 1 array, padded so that the items start at a multiple of 64 bytes.
std::string npy_header(const std::string& type, const std::string& shape) {
  std::string dictionary = "{'descr': '" + type + "', 'fortran_order': False, 'shape': " + shape + ", }";
  while ((10 + dictionary.size() + 1) % 64 != 0) dictionary += ' ';
  dictionary += '\n';
  std::string header("\x93NUMPY\x01\x00", 8);
  append_little(header, dictionary.size(), 2);
  return header + dictionary;
}

/// Writes members one after the other, and the directory at the end. Every size is written in the zip64 way:
/// members of any length, one rule.
class StoredZip {
 public:
  explicit StoredZip(OutputFile& file) : file_(file) {}

  void add(const std::string& name, const std::string& header, std::string_view items) {
    const std::uint32_t crc = crc32_of(crc32_of(0, header), items);
    const std::uint64_t size = header.size() + items.size();
    std::string local;
    append_little(local, 0x04034b50, 4);
    append_common(local, crc, name.size());
    append_little(local, 20, 2);
    local += name;
    append_little(local, 1, 2);
    append_little(local, 16, 2);
    append_little(local, size, 8);
    append_little(local, size, 8);

    append_little(directory_, 0x02014b50, 4);
    append_little(directory_, 45, 2);
    append_common(directory_, crc, name.size());
    append_little(directory_, 28, 2);
    append_little(directory_, 0, 2);  // comment
    append_little(directory_, 0, 2);  // disk
    append_little(directory_, 0, 2);  // internal attributes
    append_little(directory_, 0, 4);  // external attributes
    append_little(directory_, 0xffffffffU, 4);
    directory_ += name;
    append_little(directory_, 1, 2);
    append_little(directory_, 24, 2);
    append_little(directory_, size, 8);
    append_little(directory_, size, 8);
    append_little(directory_, position_, 8);
    ++members_;

    file_.write(local);
    file_.write(header);
    file_.write(items);
    position_ += local.size() + size;
  }

  void finish() {
    std::string end;
    append_little(end, 0x06064b50, 4);
    append_little(end, 44, 8);
    append_little(end, 45, 2);
    append_little(end, 45, 2);
    append_little(end, 0, 4);
    append_little(end, 0, 4);
    append_little(end, members_, 8);
    append_little(end, members_, 8);
    append_little(end, directory_.size(), 8);
    append_little(end, position_, 8);
    append_little(end, 0x07064b50, 4);
    append_little(end, 0, 4);
    append_little(end, position_ + directory_.size(), 8);
    append_little(end, 1, 4);
    append_little(end, 0x06054b50, 4);
    append_little(end, 0, 4);
    append_little(end, members_, 2);
    append_little(end, members_, 2);
    append_little(end, directory_.size(), 4);
    append_little(end, 0xffffffffU, 4);
    append_little(end, 0, 2);
    file_.write(directory_);
    file_.write(end);
  }

 private:
  /// Fields that local header and directory share, from the version needed to the length of the name.
  static void append_common(std::string& text, std::uint32_t crc, std::size_t name_size) {
    append_little(text, 45, 2);
    append_little(text, 0, 2);     // flags
    append_little(text, 0, 2);     // stored
    append_little(text, 0, 2);     // time
    append_little(text, 0x21, 2);  // 1 January 1980: the same matrix gives the same file
    append_little(text, crc, 4);
    append_little(text, 0xffffffffU, 4);
    append_little(text, 0xffffffffU, 4);
    append_little(text, name_size, 2);
  }

  OutputFile& file_;
  std::string directory_;
  std::uint64_t position_ = 0, members_ = 0;
};

template <class Item>
std::string_view bytes_of(const Buffer<Item>& items) {
  return {reinterpret_cast<const char*>(items.data()), static_cast<std::size_t>(items.size()) * sizeof(Item)};
}

std::string vector_shape(Offset items) {
  return "(" + std::to_string(items) + ",)";
}

}  // namespace

void write_npz(const SymmetricMatrix& matrix, OutputFile& file) {
  const WholeMatrix whole = expand(matrix);
  StoredZip zip(file);
  // SciPy asks that indices and indptr have one type: 32 bits while the entries can be counted so.
  const bool narrow = whole.index.size() <= 0x7fffffff;
  Buffer<std::int32_t> narrow_start(narrow ? whole.start.size() : 0);
  for (Offset i = 0; i < narrow_start.size(); ++i)
    narrow_start[i] = static_cast<std::int32_t>(whole.start[i]);
  Buffer<std::int64_t> wide_index(narrow ? 0 : whole.index.size());
  for (Offset i = 0; i < wide_index.size(); ++i) wide_index[i] = whole.index[i];
  const std::string type = narrow ? "<i4" : "<i8";
  zip.add("indices.npy", npy_header(type, vector_shape(whole.index.size())),
          narrow ? bytes_of(whole.index) : bytes_of(wide_index));
  zip.add("indptr.npy", npy_header(type, vector_shape(whole.start.size())),
          narrow ? bytes_of(narrow_start) : bytes_of(whole.start));
  zip.add("format.npy", npy_header("|S3", "()"), "csr");
  std::string shape;
  append_little(shape, static_cast<std::uint64_t>(matrix.rows), 8);
  append_little(shape, static_cast<std::uint64_t>(matrix.rows), 8);
  zip.add("shape.npy", npy_header("<i8", "(2,)"), shape);
  zip.add("data.npy", npy_header("<f8", vector_shape(whole.value.size())), bytes_of(whole.value));
  zip.finish();
}

}  // namespace stanchion
