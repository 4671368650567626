#include "service/origin.hpp"

#include <algorithm>

namespace stanchion::service {

std::string host_name_of(const std::string& host_field) {
  std::string name = host_field;
  std::transform(name.begin(), name.end(), name.begin(),
                 [](char c) { return c >= 'A' && c <= 'Z' ? static_cast<char>(c - 'A' + 'a') : c; });
  if (!name.empty() && name[0] == '[') {
    const std::size_t end = name.find(']');
    return end == std::string::npos ? "" : name.substr(1, end - 1);
  }
  return name.substr(0, name.find(':'));
}

OriginVerdict judge_origin(const RequestHead& head, const OriginRules& rules, bool is_page) {
  const std::string& host = head.field("host");
  const std::string name = host_name_of(host);
  if (!rules.any_host && std::find(rules.hosts.begin(), rules.hosts.end(), name) == rules.hosts.end()) {
    return OriginVerdict::kWrongHost;
  }
  const bool reads = head.method == "GET" || head.method == "HEAD";
  if (is_page && reads) return OriginVerdict::kFine;
  const std::string& site = head.field("sec-fetch-site");
  if (!site.empty() && site != "same-origin" && site != "none") return OriginVerdict::kOtherSite;
  if (head.fields.count("origin") != 0) {
    const std::string& origin = head.field("origin");
    if (origin != "http://" + host && origin != "https://" + host) return OriginVerdict::kOtherSite;
  }
  return OriginVerdict::kFine;
}

}  // namespace stanchion::service
