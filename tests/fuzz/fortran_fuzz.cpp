// Any text as a Fortran format, and any text as a line read by it.
#include <cmath>
#include <cstdint>
#include <cstdlib>
#include <string_view>

#include "io/fortran_format.hpp"

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
  using namespace stanchion;
  const std::string_view text(reinterpret_cast<const char*>(data), size);
  const std::size_t line_end = text.find('\n');
  const auto format = parse_fortran_format(text.substr(0, line_end));
  if (!format || line_end == std::string_view::npos) return 0;
  const std::string_view line = text.substr(line_end + 1);
  for (int field = 0; field < 3; ++field) {
    double value = 0;
    Offset whole = 0;
    if (read_fortran_real(line, field, *format, value) == NumberFault::kNone && !std::isfinite(value))
      std::abort();
    (void)read_fortran_whole(line, field, *format, whole);
  }
  return 0;
}
