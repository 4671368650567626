// SciPy sparse archives: a zip of NumPy arrays named format, shape, data and indices, indptr or row, col.
#include <algorithm>
#include <limits>

#include "io/compressed_rows.hpp"
#include "io/entry_text.hpp"
#include "io/matrix_formats.hpp"
#include "io/npy.hpp"

namespace stanchion {
namespace {

class NpzReader {
 public:
  explicit NpzReader(const ReadTask& task) : task_(task), path_(task.path()) {}

  Result<RawMatrix> read() {
    auto members = list_zip(task_.source.text(), path_);
    if (!members.ok()) return members.status();
    members_ = std::move(*members);
    if (Status status = read_format(); !status.ok()) return status;
    if (Status status = read_shape(); !status.ok()) return status;
    RawMatrix raw;
    raw.rows = rows_;
    raw.format = "SciPy sparse archive, " + format_;
    if (Status status = read_values(raw.entries); !status.ok()) return status;
    Status status = format_ == "coo" ? read_coordinates(raw.entries) : read_compressed(raw.entries);
    if (!status.ok()) return status;
    return raw;
  }

 private:
  Status refuse(const char* code, const std::string& message) const {
    return Status::bad_input(code, message, path_,
                             "save the matrix with scipy.sparse.save_npz as csr, csc or coo");
  }

  Status find(const char* name, const ZipMember*& found) const {
    for (const ZipMember& member : members_) {
      if (member.name == std::string(name) + ".npy") {
        found = &member;
        return {};
      }
    }
    return refuse("missing-array",
                  std::string("the archive has no array \"") + name + "\": it is no sparse matrix");
  }

  Status read_format() {
    const ZipMember* member = nullptr;
    if (Status status = find("format", member); !status.ok()) return status;
    std::string text;
    NpyHeader kept;
    const NpySink sink{[&](const NpyHeader& header) {
                         kept = header;
                         const bool words = header.kind == NpyKind::kBytes || header.kind == NpyKind::kText;
                         return words && header.items() == 1 ? Status()
                                                             : refuse("bad-array", "the format is no word");
                       },
                       [&](Offset, std::string_view items) {
                         // Text is UTF-32: its other bytes are zero, as is the padding of byte strings.
                         for (const char c : items) text += c != '\0' ? std::string(1, c) : std::string();
                         return Status();
                       }};
    if (Status status = read_npy(*member, path_, sink); !status.ok()) return status;
    format_ = text;
    if (format_ == "csr" || format_ == "csc" || format_ == "coo") return {};
    return Status::bad_input("unsupported-format", "the sparse format is \"" + excerpt(format_) + "\"", path_,
                             "convert it with .tocsr() before saving");
  }

  /// Checks that an array is a vector of numbers, `length` long unless that is negative.
  Status check_vector(const NpyHeader& header, const char* name, bool whole, Offset length) const {
    if (!npy_numeric(header) || (whole && header.kind == NpyKind::kReal)) {
      return Status::bad_input(
          header.type.find('c') != std::string::npos ? "complex-matrix" : "unsupported-type",
          std::string("the array \"") + name + "\" has type " + header.type, path_,
          whole ? "save indices as int32 or int64" : "save real values as float64 (.astype(\"float64\"))");
    }
    if (header.shape.size() != 1 || (length >= 0 && header.items() != length)) {
      return Status::bad_input("wrong-count",
                               std::string("the array \"") + name + "\" has " +
                                   std::to_string(header.items()) + " items" +
                                   (length >= 0 ? ", " + std::to_string(length) + " belong there" : ""),
                               path_, "save the matrix again");
    }
    return {};
  }

  Status read_wholes(const char* name, Offset length,
                     const std::function<void(Offset, Offset)>& store) const {
    const ZipMember* member = nullptr;
    if (Status status = find(name, member); !status.ok()) return status;
    NpyHeader kept;
    const NpySink sink{[&](const NpyHeader& header) {
                         kept = header;
                         return check_vector(header, name, true, length);
                       },
                       [&](Offset first, std::string_view items) {
                         const Offset count = static_cast<Offset>(items.size()) / kept.item_bytes;
                         for (Offset i = 0; i < count; ++i) store(first + i, npy_whole(kept, items, i));
                         return Status();
                       }};
    return read_npy(*member, path_, sink);
  }

  Status read_shape() {
    Offset shape[2] = {0, 0};
    const Status status = read_wholes("shape", 2, [&](Offset at, Offset extent) { shape[at] = extent; });
    if (!status.ok()) return status;
    rows_ = static_cast<Index>(std::clamp<Offset>(shape[0], 0, std::numeric_limits<Index>::max()));
    return check_shape(shape[0], shape[1], path_);
  }

  Status read_values(EntryList& entries) {
    const ZipMember* member = nullptr;
    if (Status status = find("data", member); !status.ok()) return status;
    NpyHeader kept;
    const NpySink sink{
        [&](const NpyHeader& header) {
          kept = header;
          if (Status status = check_vector(header, "data", false, -1); !status.ok()) return status;
          if (Status status = check_memory(rows_, header.items(), task_.most_bytes, path_); !status.ok()) {
            return status;
          }
          entries = EntryList(header.items());
          return Status();
        },
        [&](Offset first, std::string_view items) { return store_values(kept, first, items, entries); }};
    return read_npy(*member, path_, sink);
  }

  Status store_values(const NpyHeader& header, Offset first, std::string_view items,
                      EntryList& entries) const {
    const Offset count = static_cast<Offset>(items.size()) / header.item_bytes;
    for (Offset i = 0; i < count; ++i) {
      if (header.kind == NpyKind::kReal) {
        entries.value[first + i] = npy_real(header, items, i);
        continue;
      }
      const Offset whole = npy_whole(header, items, i);
      if (whole > kExactInDouble || whole < -kExactInDouble) {
        return Status::bad_input("integer-rounds",
                                 "value " + std::to_string(first + i) +
                                     " (from 0) is a whole number beyond 2^53 and "
                                     "would be rounded",
                                 path_, "scale the matrix, or save it as float64 if the rounding is meant");
      }
      entries.value[first + i] = static_cast<double>(whole);
    }
    return {};
  }

  /// Indices that do not fit become -1, which the checks that follow refuse.
  static Index narrow(Offset index) {
    return index >= 0 && index < std::numeric_limits<Index>::max() ? static_cast<Index>(index) : -1;
  }

  Status read_compressed(EntryList& entries) {
    const Offset count = entries.size();
    Status status =
        read_wholes("indices", count, [&](Offset at, Offset index) { entries.row[at] = narrow(index); });
    if (!status.ok()) return status;
    Buffer<Offset> pointers(Offset{rows_} + 1);
    status =
        read_wholes("indptr", pointers.size(), [&](Offset at, Offset pointer) { pointers[at] = pointer; });
    if (!status.ok()) return status;
    if (status = check_row_pointers(pointers, count, path_); !status.ok()) return status;
    return spread_rows(pointers, rows_, format_ == "csc", entries, path_, task_.options.dofs);
  }

  Status read_coordinates(EntryList& entries) {
    Status status =
        read_wholes("row", entries.size(), [&](Offset at, Offset index) { entries.row[at] = narrow(index); });
    if (!status.ok()) return status;
    status = read_wholes("col", entries.size(),
                         [&](Offset at, Offset index) { entries.column[at] = narrow(index); });
    return status.ok() ? fold_entries(rows_, entries, path_, task_.options.dofs) : status;
  }

  const ReadTask& task_;
  const std::string& path_;
  std::vector<ZipMember> members_;
  std::string format_;
  Index rows_ = 0;
};

}  // namespace

Result<RawMatrix> read_npz(const ReadTask& task) {
  return NpzReader(task).read();
}

}  // namespace stanchion
