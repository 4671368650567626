// Whether a request comes from where it may: the right host name, and no other web site behind it.
#pragma once

#include <string>
#include <vector>

#include "service/http_message.hpp"

namespace stanchion::service {

struct OriginRules {
  std::vector<std::string> hosts;  ///< names in lower case without a port; what `Host` may say
  bool any_host = false;           ///< behind a proxy that was given no name
};

enum class OriginVerdict {
  kFine,
  kWrongHost,  ///< a name that is not ours points here (DNS rebinding)
  kOtherSite,  ///< a page of another site asks
};

/// Looks at Host, Origin and Sec-Fetch-Site. Plain pages may be reached by a link from anywhere
/// (`is_page`); everything else is for programs, which send no Origin, and for the service's own page.
OriginVerdict judge_origin(const RequestHead& head, const OriginRules& rules, bool is_page);

/// "Name:80" to "name"; "[::1]:80" to "::1".
std::string host_name_of(const std::string& host_field);

}  // namespace stanchion::service
