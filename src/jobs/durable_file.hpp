// Small files that survive a crash or a power cut: whole or not at all, and on the disk before it is said so.
#pragma once

#include <optional>
#include <string>
#include <string_view>

#include "stanchion/status.hpp"

namespace stanchion {

/// Writes under a temporary name, flushes to the disk, renames into place and flushes the folder. An older
/// file stays as it was on failure. Resource limit "write-failed".
Status write_durably(const std::string& path, std::string_view bytes);

/// All bytes of a regular file; nothing when it cannot be read.
std::optional<std::string> read_whole(const std::string& path);

}  // namespace stanchion
