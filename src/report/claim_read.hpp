// One claim of a document that nobody vouches for, read back.
#pragma once

#include "report/json_member.hpp"
#include "stanchion/outcome.hpp"

namespace stanchion {

/// Throws json_parts::BadMember when it is no count with its certificate.
ShiftCount read_count_claim(const json_parts::Member& claim);

}  // namespace stanchion
