// Opening the small text files that accompany a matrix.
#pragma once

#include <new>
#include <string>
#include <string_view>

#include "io/text_source.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// Most that a compressed support file may decompress to: far above any table of nodes or equations.
inline constexpr Offset kLargestSupportFile = Offset{8} << 30;

/// Opens `path` (plain or .gz) and hands its text to `parse`; running out of memory becomes a Status.
template <class Parse>
auto with_small_file(const std::string& path, const Parse& parse) -> decltype(parse(std::string_view())) {
  try {
    auto source = TextSource::open(path, kLargestSupportFile);
    if (!source.ok()) return source.status();
    return parse(source->text());
  } catch (const std::bad_alloc&) {
    return Status::resource_limit("out-of-memory", "no memory left to read the file", path,
                                  "use a machine with more memory");
  }
}

}  // namespace stanchion
