#include "service/api_parameters.hpp"

#include <charconv>

#include "service/problem.hpp"

namespace stanchion::service {

std::optional<std::int64_t> whole_parameter(const RequestHead& head, const std::string& name,
                                            std::int64_t otherwise, std::int64_t least, std::int64_t most,
                                            HttpResponse& refusal) {
  const auto text = head.parameter(name);
  if (!text) return otherwise;
  std::int64_t value = 0;
  const auto parsed = std::from_chars(text->data(), text->data() + text->size(), value);
  if (parsed.ec == std::errc{} && parsed.ptr == text->data() + text->size() && value >= least &&
      value <= most) {
    return value;
  }
  refusal =
      problem_response(400, "bad-request", "'" + name + "' is no number in its range",
                       "a whole number from " + std::to_string(least) + " to " + std::to_string(most), name);
  return std::nullopt;
}

}  // namespace stanchion::service
