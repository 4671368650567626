#include "jobs/strict_json.hpp"

#include <fmt/format.h>

#include <set>
#include <string>
#include <vector>

namespace stanchion {
namespace {

using Json = nlohmann::json;

struct Refused {
  std::string message;
};

/// Watches the parser go by.
class Watch {
 public:
  explicit Watch(int most_depth) : most_depth_(most_depth) {}

  void see(int depth, Json::parse_event_t event, const Json& parsed) {
    if (depth > most_depth_) throw Refused{fmt::format("nested more than {} deep", most_depth_)};
    if (event == Json::parse_event_t::object_start) keys_.emplace_back();
    if (event == Json::parse_event_t::object_end) keys_.pop_back();
    if (event != Json::parse_event_t::key) return;
    const auto& key = parsed.get_ref<const std::string&>();
    if (!keys_.back().insert(key).second) throw Refused{fmt::format("the key '{}' is there twice", key)};
  }

 private:
  int most_depth_;
  std::vector<std::set<std::string>> keys_;
};

/// The parser's complaint without its own prefix "[json.exception.parse_error.101] ".
std::string plain(const std::string& complaint) {
  const auto end = complaint.find("] ");
  return complaint.rfind("[json", 0) == 0 && end != std::string::npos ? complaint.substr(end + 2) : complaint;
}

}  // namespace

Result<Json> strict_json(std::string_view text, int most_depth) {
  Watch watch(most_depth);
  std::string complaint;
  try {
    return Json::parse(text.begin(), text.end(),
                       [&watch](int depth, Json::parse_event_t event, Json& parsed) {
                         watch.see(depth, event, parsed);
                         return true;
                       });
  } catch (const Json::exception& error) {
    complaint = plain(error.what());
  } catch (const Refused& refused) {
    complaint = refused.message;
  }
  return Status::bad_input("bad-json", complaint, "", "write one JSON object");
}

}  // namespace stanchion
