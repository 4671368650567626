// A sparse matrix in an HDF5 group: datasets data, indices, indptr, and shape as dataset or attribute.
#include <algorithm>
#include <limits>
#include <vector>

#include "io/compressed_rows.hpp"
#include "io/entry_text.hpp"
#include "io/hdf5_handle.hpp"
#include "io/matrix_formats.hpp"

namespace stanchion {
namespace {

using hdf5::Handle;

constexpr Offset kBlock = Offset{1} << 20;
constexpr const char* kLayout = "give one group with the datasets data, indices, indptr and a shape";

bool has_dataset(hid_t group, const char* name) {
  if (H5Lexists(group, name, H5P_DEFAULT) <= 0) return false;
  const Handle object(H5Oopen(group, name, H5P_DEFAULT), H5Oclose);
  return object.ok() && H5Iget_type(object) == H5I_DATASET;
}

bool is_matrix_group(hid_t group) {
  return has_dataset(group, "data") && has_dataset(group, "indices") && has_dataset(group, "indptr");
}

/// Collects the names of matrix groups while the file is walked; C callback, nothing may be thrown.
herr_t collect(hid_t root, const char* name, const H5O_info_t* facts, void* found) {
  if (facts->type != H5O_TYPE_GROUP) return 0;
  const Handle group(H5Gopen2(root, name, H5P_DEFAULT), H5Gclose);
  if (!group.ok() || !is_matrix_group(group)) return 0;
  try {
    static_cast<std::vector<std::string>*>(found)->emplace_back(name);
  } catch (...) {
    return -1;
  }
  return 0;
}

class Hdf5Reader {
 public:
  Hdf5Reader(const std::string& path, const std::string& group, Offset most_bytes, const DofMap* dofs)
      : path_(path), wanted_(group), most_bytes_(most_bytes), dofs_(dofs) {}

  Result<RawMatrix> read() {
    const Handle file(H5Fopen(path_.c_str(), H5F_ACC_RDONLY, H5P_DEFAULT), H5Fclose);
    if (!file.ok())
      return refuse("damaged-hdf5", "the HDF5 file cannot be opened; it may be cut off or in use");
    std::string name = wanted_;
    if (Status status = choose_group(file, name); !status.ok()) return status;
    const Handle group(H5Gopen2(file, name.c_str(), H5P_DEFAULT), H5Gclose);
    if (!group.ok() || !is_matrix_group(group)) {
      return Status::bad_input("no-matrix-group",
                               "the group \"" + excerpt(name) + "\" holds no sparse matrix", path_, kLayout);
    }
    RawMatrix raw;
    if (Status status = read_shape(group, raw.rows); !status.ok()) return status;
    bool by_columns = false;
    if (Status status = read_format(group, by_columns, raw.format); !status.ok()) return status;
    if (Status status = read_values(group, raw); !status.ok()) return status;
    if (Status status = read_structure(group, by_columns, raw); !status.ok()) return status;
    return raw;
  }

 private:
  Status refuse(const char* code, const std::string& message) const {
    const bool damaged = std::string_view(code) == "damaged-hdf5";
    return Status::bad_input(code, message, path_, damaged ? "write or transfer the file again" : kLayout);
  }

  Status choose_group(hid_t file, std::string& name) const {
    if (!name.empty()) return {};
    std::vector<std::string> found;
    if (H5Ovisit(file, H5_INDEX_NAME, H5_ITER_INC, collect, &found) < 0) {
      return refuse("damaged-hdf5", "the groups of the HDF5 file cannot be listed");
    }
    if (found.empty()) {
      return Status::bad_input("no-matrix-group", "no group of the file holds a sparse matrix", path_,
                               kLayout);
    }
    if (found.size() > 1) {
      std::string names;
      for (std::size_t i = 0; i < std::min<std::size_t>(found.size(), 5); ++i)
        names += " /" + excerpt(found[i]);
      return Status::bad_input("several-groups",
                               std::to_string(found.size()) + " groups of the file hold a matrix:" + names,
                               path_, "name one of them as FILE:/group");
    }
    name = found.front();
    return {};
  }

  /// Number of items of a one-dimensional dataset or attribute space; -1 for any other.
  static Offset length_of(hid_t space) {
    if (space < 0 || H5Sget_simple_extent_ndims(space) != 1) return -1;
    hsize_t extent = 0;
    if (H5Sget_simple_extent_dims(space, &extent, nullptr) != 1) return -1;
    return extent <= static_cast<hsize_t>(std::numeric_limits<Index>::max()) * 4096
               ? static_cast<Offset>(extent)
               : -1;
  }

  Status read_shape(hid_t group, Index& rows) const {
    std::int64_t shape[2] = {0, 0};
    bool found = false;
    for (const char* name : {"shape", "h5sparse_shape"}) {
      if (found || H5Aexists(group, name) <= 0) continue;
      const Handle attribute(H5Aopen(group, name, H5P_DEFAULT), H5Aclose);
      const Handle space(attribute.ok() ? H5Aget_space(attribute) : -1, H5Sclose);
      found = length_of(space) == 2 && H5Aread(attribute, H5T_NATIVE_INT64, shape) >= 0;
    }
    if (!found && has_dataset(group, "shape")) {
      const Handle dataset(H5Dopen2(group, "shape", H5P_DEFAULT), H5Dclose);
      const Handle space(dataset.ok() ? H5Dget_space(dataset) : -1, H5Sclose);
      found = length_of(space) == 2 &&
              H5Dread(dataset, H5T_NATIVE_INT64, H5S_ALL, H5S_ALL, H5P_DEFAULT, shape) >= 0;
    }
    if (!found) return refuse("missing-shape", "the group has no shape of two whole numbers");
    if (Status status = check_shape(shape[0], shape[1], path_); !status.ok()) return status;
    rows = static_cast<Index>(shape[0]);
    return {};
  }

  /// A text attribute, empty when there is none.
  static std::string text_attribute(hid_t group, const char* name) {
    if (H5Aexists(group, name) <= 0) return {};
    const Handle attribute(H5Aopen(group, name, H5P_DEFAULT), H5Aclose);
    const Handle type(attribute.ok() ? H5Aget_type(attribute) : -1, H5Tclose);
    const Handle space(attribute.ok() ? H5Aget_space(attribute) : -1, H5Sclose);
    if (!type.ok() || !space.ok() || H5Tget_class(type) != H5T_STRING ||
        H5Sget_simple_extent_npoints(space) != 1) {
      return {};
    }
    if (H5Tis_variable_str(type) > 0) {
      char* text = nullptr;
      const Handle memory(H5Tcopy(type), H5Tclose);
      if (H5Aread(attribute, memory, &text) < 0 || text == nullptr) return {};
      std::string copy(text);
      H5free_memory(text);
      return copy;
    }
    const std::size_t size = H5Tget_size(type);
    if (size == 0 || size > 256) return {};
    std::string text(size, '\0');
    if (H5Aread(attribute, type, text.data()) < 0) return {};
    return text.substr(0, text.find('\0'));
  }

  Status read_format(hid_t group, bool& by_columns, std::string& format) const {
    std::string word;
    for (const char* name : {"format", "h5sparse_format", "encoding-type"}) {
      if (word.empty()) word = lower_case(text_attribute(group, name)).substr(0, 3);
    }
    by_columns = word == "csc";
    if (!word.empty() && word != "csr" && word != "csc") {
      return Status::bad_input("unsupported-format", "the sparse format is \"" + excerpt(word) + "\"", path_,
                               "store the matrix as csr or csc");
    }
    // Rows or columns makes no difference where symmetry is checked anyway.
    format = "HDF5 group, " + (word.empty() ? std::string("by rows or columns") : word);
    return {};
  }

  /// Opens a dataset of numbers and hands it over in blocks as `Item`s.
  template <class Item, class Take>
  Status read_blocks(hid_t group, const char* name, hid_t memory_type, Offset length,
                     const Take& take) const {
    const Handle dataset(H5Dopen2(group, name, H5P_DEFAULT), H5Dclose);
    const Handle space(dataset.ok() ? H5Dget_space(dataset) : -1, H5Sclose);
    std::vector<Item> block(static_cast<std::size_t>(std::min(length, kBlock)));
    for (Offset first = 0; first < length; first += kBlock) {
      const hsize_t start = static_cast<hsize_t>(first),
                    count = static_cast<hsize_t>(std::min(kBlock, length - first));
      const Handle memory(H5Screate_simple(1, &count, nullptr), H5Sclose);
      if (!memory.ok() || H5Sselect_hyperslab(space, H5S_SELECT_SET, &start, nullptr, &count, nullptr) < 0 ||
          H5Dread(dataset, memory_type, memory, space, H5P_DEFAULT, block.data()) < 0) {
        return refuse("damaged-hdf5", std::string("the dataset \"") + name + "\" cannot be read");
      }
      for (hsize_t i = 0; i < count; ++i) {
        if (Status status = take(first + static_cast<Offset>(i), block[i]); !status.ok()) return status;
      }
    }
    return {};
  }

  struct Numbers {
    Offset length = -1;
    bool whole = false;
    std::size_t bytes = 0;
  };

  Status look_at(hid_t group, const char* name, Numbers& numbers) const {
    const Handle dataset(H5Dopen2(group, name, H5P_DEFAULT), H5Dclose);
    const Handle space(dataset.ok() ? H5Dget_space(dataset) : -1, H5Sclose);
    const Handle type(dataset.ok() ? H5Dget_type(dataset) : -1, H5Tclose);
    numbers.length = length_of(space);
    if (!type.ok() || numbers.length < 0) {
      return refuse("bad-array", std::string("the dataset \"") + name + "\" is no list of numbers");
    }
    const Handle layout(H5Dget_create_plist(dataset), H5Pclose);
    if (!layout.ok() || H5Pget_external_count(layout) != 0 || H5Pget_layout(layout) == H5D_VIRTUAL) {
      return refuse("external-data", std::string("the dataset \"") + name + "\" lies in another file");
    }
    const H5T_class_t kind = H5Tget_class(type);
    numbers.whole = kind == H5T_INTEGER;
    numbers.bytes = H5Tget_size(type);
    if (kind == H5T_COMPOUND) {
      return Status::bad_input("complex-matrix",
                               std::string("the dataset \"") + name + "\" is complex or compound", path_,
                               "store the real stiffness as float64");
    }
    if ((kind != H5T_FLOAT && kind != H5T_INTEGER) || numbers.bytes > 8) {
      return refuse("unsupported-type",
                    std::string("the dataset \"") + name + "\" is neither float64 nor integer");
    }
    return {};
  }

  Status read_values(hid_t group, RawMatrix& raw) const {
    Numbers numbers;
    if (Status status = look_at(group, "data", numbers); !status.ok()) return status;
    if (Status status = check_memory(raw.rows, numbers.length, most_bytes_, path_); !status.ok())
      return status;
    raw.entries = EntryList(numbers.length);
    Buffer<double>& values = raw.entries.value;
    if (!numbers.whole) {
      return read_blocks<double>(group, "data", H5T_NATIVE_DOUBLE, numbers.length,
                                 [&](Offset at, double value) {
                                   values[at] = value;
                                   return Status();
                                 });
    }
    return read_blocks<std::int64_t>(
        group, "data", H5T_NATIVE_INT64, numbers.length, [&](Offset at, std::int64_t value) {
          if (value > kExactInDouble || value < -kExactInDouble) {
            return Status::bad_input("integer-rounds",
                                     "value " + std::to_string(at) +
                                         " (from 0) is a whole number beyond 2^53 and would be rounded",
                                     path_,
                                     "scale the matrix, or store it as float64 if the rounding is meant");
          }
          values[at] = static_cast<double>(value);
          return Status();
        });
  }

  Status read_structure(hid_t group, bool by_columns, RawMatrix& raw) const {
    const auto wrong_count = [&](const char* name, Offset found, Offset belongs) {
      return Status::bad_input("wrong-count",
                               std::string("the dataset \"") + name + "\" has " + std::to_string(found) +
                                   " items, " + std::to_string(belongs) + " belong there",
                               path_, "write the file again");
    };
    Numbers indices, pointers;
    if (Status status = look_at(group, "indices", indices); !status.ok()) return status;
    if (Status status = look_at(group, "indptr", pointers); !status.ok()) return status;
    if (!indices.whole || !pointers.whole)
      return refuse("unsupported-type", "indices and indptr must be whole numbers");
    if (indices.length != raw.entries.size())
      return wrong_count("indices", indices.length, raw.entries.size());
    if (pointers.length != Offset{raw.rows} + 1)
      return wrong_count("indptr", pointers.length, Offset{raw.rows} + 1);
    Status status = read_blocks<std::int64_t>(
        group, "indices", H5T_NATIVE_INT64, indices.length, [&](Offset at, std::int64_t index) {
          // What does not fit becomes -1, which spread_rows refuses.
          raw.entries.row[at] = index >= 0 && index < raw.rows ? static_cast<Index>(index) : -1;
          return Status();
        });
    if (!status.ok()) return status;
    Buffer<Offset> start(pointers.length);
    status = read_blocks<std::int64_t>(group, "indptr", H5T_NATIVE_INT64, pointers.length,
                                       [&](Offset at, std::int64_t pointer) {
                                         start[at] = pointer;
                                         return Status();
                                       });
    if (!status.ok()) return status;
    if (status = check_row_pointers(start, raw.entries.size(), path_); !status.ok()) return status;
    return spread_rows(start, raw.rows, by_columns, raw.entries, path_, dofs_);
  }

  const std::string& path_;
  const std::string& wanted_;
  Offset most_bytes_;
  const DofMap* dofs_;
};

}  // namespace

Result<RawMatrix> read_hdf5(const std::string& path, const std::string& group, Offset most_bytes,
                            const DofMap* dofs) {
  const hdf5::Session session;
  return Hdf5Reader(path, group, most_bytes, dofs).read();
}

}  // namespace stanchion
