// Index types shared by every level.
#pragma once

#include <cstdint>

namespace stanchion {

/// A row, column, node or supernode number, from 0. Messages to people number equations from 1.
using Index = std::int32_t;

/// A count or position of matrix entries, factor entries or bytes; never limited to 32 bits.
using Offset = std::int64_t;

}  // namespace stanchion
