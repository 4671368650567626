// Parameters of a query, checked.
#pragma once

#include <cstdint>
#include <optional>
#include <string>

#include "service/http_message.hpp"

namespace stanchion::service {

/// A whole number within bounds, `otherwise` when it is not given; nothing, with the answer in `refusal`,
/// when it is none.
std::optional<std::int64_t> whole_parameter(const RequestHead& head, const std::string& name,
                                            std::int64_t otherwise, std::int64_t least, std::int64_t most,
                                            HttpResponse& refusal);

}  // namespace stanchion::service
