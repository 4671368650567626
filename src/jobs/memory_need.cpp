#include "jobs/memory_need.hpp"

#include <sys/stat.h>

#include <algorithm>
#include <nlohmann/json.hpp>

namespace stanchion {
namespace {

constexpr Offset kMebi = Offset{1} << 20;
constexpr Offset kProgram =
    48 * kMebi;  // the program and its libraries, measured: 17 MB at rest, some more at work
constexpr Offset kBytesForAByte =
    40;  // of text, for small solids: the worst of the shipped kinds needs some 20

}  // namespace

Offset input_bytes(const JobRequest& request) {
  Offset bytes = 0;
  for (const JobInput& input : request.inputs) {
    struct stat about {};
    if (::stat(input.path.c_str(), &about) == 0 && S_ISREG(about.st_mode)) bytes += Offset{about.st_size};
  }
  return bytes;
}

Offset need_from_size(Offset bytes) {
  return kProgram + kBytesForAByte * std::min(bytes, Offset{1} << 50);
}

bool locates(const JobRequest& request) {
  return request.command == "locate" ||
         std::any_of(request.options.begin(), request.options.end(),
                     [](const JobOption& option) { return option.key == "locate"; });
}

MemoryKind memory_kind(const JobRequest& request) {
  if (request.command == "bracket" || request.command == "audit") return MemoryKind::kBracket;
  return locates(request) ? MemoryKind::kLocate : MemoryKind::kCount;
}

JobRequest forecast_request(const JobRequest& request, const RequestRules& rules) {
  JobRequest forecast;
  forecast.id = request.id;
  for (const CommandTable& table : rules.commands) {
    if (table.name != "forecast") continue;
    forecast.command = table.name;
    for (const JobInput& input : request.inputs) {
      if (table.find_key(input.key) != nullptr) forecast.inputs.push_back(input);
    }
    for (const JobOption& option : request.options) {
      const OptionEntry* known = table.find_key(option.key);
      if (known != nullptr && known->use == OptionUse::kSetting && option.key != "expect") {
        forecast.options.push_back(option);
      }
    }
  }
  return forecast;
}

std::optional<Offset> need_from_forecast(const std::string& outcome, const JobRequest& request) {
  const auto json = nlohmann::json::parse(outcome, nullptr, false);
  if (!json.is_object() || !json.contains("forecast") || !json["forecast"].is_object()) return std::nullopt;
  const auto& forecast = json["forecast"];
  const auto bytes = [&forecast](const char* key) {
    return forecast.contains(key) && forecast[key].is_number_integer() ? forecast[key].get<Offset>()
                                                                       : Offset{0};
  };
  const Offset counting = bytes("peak_bytes_count"), keeping = std::max(counting, bytes("peak_bytes_solve"));
  if (counting <= 0) return std::nullopt;
  if (request.command == "forecast") return counting;
  switch (memory_kind(request)) {
    case MemoryKind::kBracket:  // a basis of vectors and a second factor beside the first
      return keeping + (keeping - counting) + keeping / 4;
    case MemoryKind::kLocate:
      return std::max(keeping, bytes("peak_bytes_locate")) + keeping / 8;
    case MemoryKind::kCount:
      break;
  }
  return keeping + keeping / 8;
}

}  // namespace stanchion
