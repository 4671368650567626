// What an answer does not say. These sentences go with every document, so that nobody reads more into a
// verdict than was shown.
#pragma once

#include <string>
#include <vector>

#include "model/question.hpp"
#include "stanchion/request.hpp"

namespace stanchion {

/// The sentences that apply to the answer of `question` on `request`, most important first; never empty.
std::vector<std::string> not_checked(const Request& request, Question question);

}  // namespace stanchion
