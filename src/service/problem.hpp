// Errors as HTTP gives them out: problem details (RFC 9457).
#pragma once

#include <string>

#include "service/http_message.hpp"
#include "service/job_record.hpp"
#include "stanchion/status.hpp"

namespace stanchion::service {

/// The members of the document as JSON text.
std::string problem_to_text(const JobProblem& problem);

HttpResponse problem_response(const JobProblem& problem);
HttpResponse problem_response(int status, std::string code, std::string detail, std::string remedy = {},
                              std::string place = {});

/// A failure of the library as answer to a request: bad usage and bad input 400, limits 507 or 503.
HttpResponse problem_response(const Status& status);

/// `text` with what is not UTF-8 replaced, so that it may stand in JSON.
std::string printable(const std::string& text);

}  // namespace stanchion::service
