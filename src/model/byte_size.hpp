// Amounts of memory as people write them.
#pragma once

#include <string>
#include <string_view>

#include "stanchion/status.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

/// Bytes of "8G", "512M", "1.5GiB", "64k" or "4096". A unit is a power of 1024, with or without a trailing B
/// or iB, in either case; no unit means bytes. Error: bad usage ("bad-size") when the text is no positive
/// amount below 2^62.
Result<Offset> parse_byte_size(std::string_view text);

/// "512 MiB", below that "64 KiB", "7 B": whole units, rounded up.
std::string size_needed(Offset bytes);

/// The same rounded down, for limits: what needs more than a limit never reads as less.
std::string size_allowed(Offset bytes);

}  // namespace stanchion
