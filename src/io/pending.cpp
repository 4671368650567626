#include "io/matrix_formats.hpp"
#include "io/write_formats.hpp"
namespace stanchion {
// Formats whose readers and writers follow.
static Status no(const std::string& p) {
  return Status::bad_input("unknown-format", "this format is not read", p, "give Matrix Market");
}
Result<RawMatrix> read_node_keyed(const ReadTask& t, char) {
  return no(t.path());
}
bool looks_like_boeing(std::string_view) {
  return false;
}
Result<RawMatrix> read_boeing(const ReadTask& t) {
  return no(t.path());
}
Result<RawMatrix> read_npz(const ReadTask& t) {
  return no(t.path());
}
Result<RawMatrix> read_hdf5(const std::string& p, const std::string&, Offset) {
  return no(p);
}
void write_rutherford_boeing(const SymmetricMatrix&, OutputFile&) {}
void write_npz(const SymmetricMatrix&, OutputFile&) {}
Status write_hdf5(const SymmetricMatrix&, const std::string& path) {
  return no(path);
}
}  // namespace stanchion
