// Any bytes as a matrix file: text formats, .npz and .gz. The first byte chooses the options.
#include <cstdint>
#include <cstdlib>
#include <string_view>

#include "io/preflight.hpp"
#include "io/read_matrix.hpp"

namespace {

using namespace stanchion;

MatrixReadOptions options_from(std::uint8_t choice) {
  MatrixReadOptions options;
  options.role = (choice & 1) != 0 ? MatrixRole::kMass : MatrixRole::kStiffness;
  options.symmetric_part = (choice & 2) != 0;
  if ((choice & 4) != 0) options.base = choice >> 3 & 1;
  if ((choice & 16) != 0) options.rows = 100;
  options.memory_limit_bytes = Offset{1} << 21;
  return options;
}

}  // namespace

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
  if (size == 0) return 0;
  static ThreadPool pool(1);
  const std::string_view bytes(reinterpret_cast<const char*>(data) + 1, size - 1);
  const auto file = read_matrix_bytes(bytes, "fuzz", options_from(data[0]), pool);
  if (!file.ok()) {
    const StatusKind kind = file.status().kind();
    if (kind != StatusKind::kBadInput && kind != StatusKind::kResourceLimit) std::abort();
    if (file.status().remedy().empty()) std::abort();
    return 0;
  }
  if (!check_invariants(file->matrix)) std::abort();
  if (!preflight({file->matrix, "fuzz"}).ok()) std::abort();
  return 0;
}
