// Group /matrix with data, indices, indptr and shape, as csr of the whole matrix.
#include "io/hdf5_handle.hpp"
#include "io/write_formats.hpp"

namespace stanchion {
namespace {

using hdf5::Handle;

bool write_dataset(hid_t group, const char* name, hid_t type, Offset items, const void* data) {
  const auto extent = static_cast<hsize_t>(items);
  const Handle space(H5Screate_simple(1, &extent, nullptr), H5Sclose);
  const Handle dataset(H5Dcreate2(group, name, type, space, H5P_DEFAULT, H5P_DEFAULT, H5P_DEFAULT), H5Dclose);
  return dataset.ok() && (items == 0 || H5Dwrite(dataset, type, H5S_ALL, H5S_ALL, H5P_DEFAULT, data) >= 0);
}

bool write_attribute(hid_t group, const char* name, hid_t type, hid_t space, const void* data) {
  const Handle attribute(H5Acreate2(group, name, type, space, H5P_DEFAULT, H5P_DEFAULT), H5Aclose);
  return attribute.ok() && H5Awrite(attribute, type, data) >= 0;
}

bool write_content(const SymmetricMatrix& matrix, const std::string& path) {
  const Handle file(H5Fcreate(path.c_str(), H5F_ACC_TRUNC, H5P_DEFAULT, H5P_DEFAULT), H5Fclose);
  if (!file.ok()) return false;
  const Handle group(H5Gcreate2(file, "matrix", H5P_DEFAULT, H5P_DEFAULT, H5P_DEFAULT), H5Gclose);
  if (!group.ok()) return false;
  const WholeMatrix whole = expand(matrix);
  const std::int64_t shape[2] = {matrix.rows, matrix.rows};
  const hsize_t two = 2;
  const Handle pair(H5Screate_simple(1, &two, nullptr), H5Sclose);
  const Handle one(H5Screate(H5S_SCALAR), H5Sclose);
  const Handle word(H5Tcopy(H5T_C_S1), H5Tclose);
  return H5Tset_size(word, 3) >= 0 && H5Tset_strpad(word, H5T_STR_NULLPAD) >= 0 &&
         write_dataset(group, "data", H5T_NATIVE_DOUBLE, whole.value.size(), whole.value.data()) &&
         write_dataset(group, "indices", H5T_NATIVE_INT32, whole.index.size(), whole.index.data()) &&
         write_dataset(group, "indptr", H5T_NATIVE_INT64, whole.start.size(), whole.start.data()) &&
         write_dataset(group, "shape", H5T_NATIVE_INT64, 2, shape) &&
         write_attribute(group, "shape", H5T_NATIVE_INT64, pair, shape) &&
         write_attribute(group, "format", word, one, "csr") && H5Fflush(file, H5F_SCOPE_LOCAL) >= 0;
}

}  // namespace

Status write_hdf5(const SymmetricMatrix& matrix, const std::string& path) {
  OutputFile file(path, false);
  if (!file.ok()) return file.commit();
  const hdf5::Session session;
  if (!write_content(matrix, file.temporary_path())) {
    return Status::resource_limit("write-failed", "the HDF5 file could not be written", path,
                                  "free some disk space, or write to another disk");
  }
  return file.commit();
}

}  // namespace stanchion
