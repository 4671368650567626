// An outcome as one CSV table, for spreadsheets.
#pragma once

#include <string>

#include "stanchion/outcome.hpp"

namespace stanchion {

/// Rows of one header `table,item,quantity,value`: inertia, counts, causes, ranked nodes, local accuracy,
/// warnings. Fields with commas, quotes or line breaks are quoted (RFC 4180). Numbers read back to the same
/// bits.
std::string to_csv(const Outcome& outcome);

}  // namespace stanchion
