// The pieces that the JSON documents share: how each part of an outcome is written.
#pragma once

#include <nlohmann/json.hpp>
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include "stanchion/outcome.hpp"

namespace stanchion::json_parts {

using Json = nlohmann::ordered_json;

/// JSON has no NaN and no Infinity: these become null.
Json json_of(double number);
Json json_of(Index number);
Json json_of(const std::string& text);
Json json_of(Verdict verdict);
Json json_of(const Inertia& inertia);
Json json_of(const OffsetRun& run);
Json json_of(const Certificate& certificate);
Json json_of(const ConstrainedOutcome& constrained);
Json json_of(const ShiftCount& count);
Json json_of(const Warning& warning);
Json json_of(const HostRecord& host);

/// {name, version} of this program.
Json program();

template <class T>
Json json_of(const std::pair<T, T>& pair) {
  return Json::array({json_of(pair.first), json_of(pair.second)});
}

template <class T>
Json json_of(const std::optional<T>& value) {
  return value ? json_of(*value) : Json(nullptr);
}

template <class T>
Json json_of(const std::vector<T>& items) {
  Json list = Json::array();
  for (const T& item : items) list.push_back(json_of(item));
  return list;
}

/// The document's bytes: indented by two spaces, ending in a newline; bytes that are no UTF-8 are replaced.
std::string bytes_of(const Json& document);

}  // namespace stanchion::json_parts
