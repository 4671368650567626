// What a request may hold, as a JSON Schema (draft 2020-12) made from the tables of the command line.
#pragma once

#include <string>

#include "jobs/job_request.hpp"

namespace stanchion {

/// The bytes of data/schemas/request-1.json.
std::string request_schema(const RequestRules& rules);

}  // namespace stanchion
