// Any bytes as one of the small tables; the first byte chooses which. The reader is the one behind every
// table, so its file name is that of a file in memory.
#include <fcntl.h>
#include <sys/mman.h>
#include <unistd.h>

#include <cstdint>
#include <cstdlib>
#include <string>

#include "io/equation_list.hpp"
#include "io/node_table.hpp"
#include "io/value_list.hpp"

namespace {

using namespace stanchion;

DofMap small_map() {
  DofMap map;
  for (int node = 1; node <= 4; ++node) map.append(node, node % 2 != 0 ? "ux" : "rz");
  return map;
}

Status read_table(std::uint8_t choice, const std::string& path) {
  static const DofMap map = small_map();
  Warnings warnings;
  switch (choice % 6) {
    case 0:
      return read_dof_map(path, warnings).status();
    case 1:
      return read_nodes(path).status();
    case 2:
      return read_axes(path).status();
    case 3:
      return read_equation_list(path, 4, nullptr, warnings).status();
    case 4:
      return read_equation_list(path, 4, &map, warnings).status();
    default:
      return read_values(path).status();
  }
}

}  // namespace

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
  if (size == 0) return 0;
  static const int file = ::memfd_create("table", 0);
  static const std::string path = "/proc/self/fd/" + std::to_string(file);
  if (::ftruncate(file, 0) != 0 || ::pwrite(file, data + 1, size - 1, 0) != static_cast<ssize_t>(size - 1))
    std::abort();
  const Status status = read_table(data[0], path);
  if (!status.ok() && (status.kind() != StatusKind::kBadInput || status.remedy().empty())) std::abort();
  return 0;
}
