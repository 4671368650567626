#include "jobs/job_request.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <filesystem>

#include "jobs/strict_json.hpp"

namespace stanchion {
namespace {

using Json = nlohmann::json;

constexpr const char* kSchemaRemedy = "data/schemas/request-1.json describes a request";

/// Thrown inside this file only, caught by parse_request.
struct Refusal {
  Status status;
};

[[noreturn]] void refuse(const std::string& place, const std::string& message,
                         const std::string& remedy = kSchemaRemedy, const char* code = "bad-request") {
  throw Refusal{Status::bad_input(code, message, place, remedy)};
}

std::string joined(const std::vector<std::string>& words) {
  return fmt::format("{}", fmt::join(words, ", "));
}

const Json& member(const Json& object, const char* key) {
  const auto found = object.find(key);
  if (found == object.end()) refuse(key, fmt::format("'{}' is missing", key));
  return *found;
}

std::string text_of(const Json& value, const std::string& place) {
  if (!value.is_string()) refuse(place, fmt::format("'{}' has to be a text", place));
  auto text = value.get<std::string>();
  if (text.empty()) refuse(place, fmt::format("'{}' is empty", place), "leave it out, or say something");
  if (text.find('\0') != std::string::npos) refuse(place, fmt::format("'{}' holds a zero byte", place));
  return text;
}

std::string real_of(const Json& value, const std::string& place) {
  if (!value.is_number()) refuse(place, fmt::format("'{}' has to be a number", place));
  const double number = value.get<double>();
  if (!std::isfinite(number)) refuse(place, fmt::format("'{}' is out of range", place));
  return fmt::format("{}", number);
}

std::string whole_of(const Json& value, const std::string& place) {
  if (value.is_number_unsigned()) return fmt::format("{}", value.get<std::uint64_t>());
  if (value.is_number_integer()) return fmt::format("{}", value.get<std::int64_t>());
  refuse(place, fmt::format("'{}' has to be a whole number", place));
}

/// The items of a list; a value that is no list counts as a list of one.
std::vector<const Json*> items_of(const Json& value, const std::string& place, const RequestLimits& limits) {
  std::vector<const Json*> items;
  if (!value.is_array()) return {&value};
  if (value.empty()) refuse(place, fmt::format("'{}' is an empty list", place), "leave it out");
  if (value.size() > limits.items) {
    refuse(place, fmt::format("'{}' has {} items, more than {}", place, value.size(), limits.items),
           "split the job");
  }
  for (const Json& item : value) items.push_back(&item);
  return items;
}

void refuse_unknown_keys(const Json& object, const std::string& place,
                         const std::vector<std::string>& known) {
  for (const auto& [key, value] : object.items()) {
    if (std::find(known.begin(), known.end(), key) != known.end()) continue;
    refuse(place.empty() ? key : place + "/" + key, fmt::format("'{}' is no key of a request", key),
           "known here: " + joined(known));
  }
}

const CommandTable& table_of(const std::string& command, const RequestRules& rules) {
  std::vector<std::string> known;
  for (const CommandTable& table : rules.commands) {
    if (!table.requestable) continue;
    if (table.name == command) return table;
    known.push_back(table.name);
  }
  refuse("command", fmt::format("'{}' is no command of a request", command), "ask one of: " + joined(known),
         "unknown-command");
}

std::vector<std::string> keys_of(const CommandTable& table, bool inputs) {
  std::vector<std::string> keys;
  for (const OptionEntry& entry : table.options) {
    if (entry.use == (inputs ? OptionUse::kInput : OptionUse::kSetting)) keys.push_back(entry.key);
  }
  return keys;
}

bool is_positional(const OptionEntry& entry) {
  return entry.kind == OptionKind::kPositional || entry.kind == OptionKind::kPositionals;
}

JobInput added_input(const OptionEntry& entry, const Json& item, const std::string& place) {
  if (!item.is_object()) {
    refuse(place, fmt::format("'{}' has to be {{\"path\", \"factor\"}}", place));
  }
  refuse_unknown_keys(item, place, {"path", "factor"});
  for (const char* key : {"path", "factor"}) {
    if (!item.contains(key)) refuse(place + "/" + key, fmt::format("'{}/{}' is missing", place, key));
  }
  (void)real_of(item["factor"], place + "/factor");
  return {entry.key, entry.name, text_of(item["path"], place + "/path"), item["factor"].get<double>()};
}

void read_inputs(const Json& inputs, const CommandTable& table, const RequestLimits& limits,
                 JobRequest& request) {
  if (!inputs.is_object()) refuse("inputs", "'inputs' has to be an object");
  refuse_unknown_keys(inputs, "inputs", keys_of(table, true));
  for (const OptionEntry& entry : table.options) {
    if (entry.use != OptionUse::kInput) continue;
    const std::string place = "inputs/" + entry.key;
    const bool required = entry.required || entry.key == "stiffness";
    if (!inputs.contains(entry.key)) {
      if (required) refuse(place, fmt::format("'{}' is missing", place), "name the file");
      continue;
    }
    const Json& value = inputs[entry.key];
    const bool several = entry.kind == OptionKind::kTexts || entry.kind == OptionKind::kPositionals;
    if (several && !value.is_array()) refuse(place, fmt::format("'{}' has to be a list", place));
    std::size_t number = 0;
    for (const Json* item : several ? items_of(value, place, limits) : std::vector<const Json*>{&value}) {
      const std::string where = several ? fmt::format("{}/{}", place, number++) : place;
      if (entry.kind == OptionKind::kTexts) {
        request.inputs.push_back(added_input(entry, *item, where));
      } else {
        request.inputs.push_back(
            {entry.key, is_positional(entry) ? "" : entry.name, text_of(*item, where), std::nullopt});
      }
    }
  }
}

/// A text option's value, one of its words where there are words.
std::string word_of(const OptionEntry& entry, const Json& value, const std::string& place) {
  const std::string text = text_of(value, place);
  const auto choices = choices_of(entry);
  if (!choices.empty() && std::find(choices.begin(), choices.end(), text) == choices.end()) {
    refuse(place, fmt::format("'{}' is none of the words of '{}'", text, place),
           "write one of: " + joined(choices));
  }
  return text;
}

void read_option(const OptionEntry& entry, const Json& value, const RequestLimits& limits,
                 JobRequest& request) {
  const std::string place = "options/" + entry.key;
  const auto add = [&](std::string text) {
    request.options.push_back({entry.key, entry.name, std::move(text), entry.kind});
  };
  switch (entry.kind) {
    case OptionKind::kFlag:
      if (!value.is_boolean()) refuse(place, fmt::format("'{}' has to be true or false", place));
      if (value.get<bool>()) add("");
      return;
    case OptionKind::kReal:
      return add(real_of(value, place));
    case OptionKind::kWhole:
      return add(whole_of(value, place));
    case OptionKind::kNumbers: {
      std::string list;
      for (const Json* item : items_of(value, place, limits)) {
        if (!list.empty()) list += ',';
        list += real_of(*item, place);
      }
      return add(std::move(list));
    }
    case OptionKind::kTexts:
      for (const Json* item : items_of(value, place, limits)) add(word_of(entry, *item, place));
      return;
    case OptionKind::kText:
    case OptionKind::kPositional:
    case OptionKind::kPositionals:
      return add(word_of(entry, value, place));
  }
}

void read_options(const Json& options, const CommandTable& table, const RequestLimits& limits,
                  JobRequest& request) {
  if (!options.is_object()) refuse("options", "'options' has to be an object");
  for (const auto& [key, value] : options.items()) {
    const OptionEntry* entry = table.find_key(key);
    if (entry != nullptr && entry->use == OptionUse::kSetting) continue;
    const std::string place = "options/" + key;
    if (entry != nullptr && entry->use == OptionUse::kInput) {
      refuse(place, fmt::format("'{}' names a file that is read", key), "move it to 'inputs'");
    }
    if (entry != nullptr) {
      refuse(place, fmt::format("'{}' is chosen by whoever runs the job", key), "leave it out",
             "unknown-option");
    }
    refuse(place, fmt::format("'{}' is no option of {}", key, table.name),
           "known: " + joined(keys_of(table, false)), "unknown-option");
  }
  for (const OptionEntry& entry : table.options) {
    if (options.contains(entry.key)) read_option(entry, options[entry.key], limits, request);
  }
}

JobRequest read_request(const Json& json, const RequestRules& rules, bool with_id,
                        const RequestLimits& limits) {
  if (!json.is_object()) refuse("", "a request is a JSON object");
  refuse_unknown_keys(json, "", {"id", "command", "inputs", "options"});
  JobRequest request;
  if (with_id || json.contains("id")) {
    request.id = text_of(member(json, "id"), "id");
    if (!is_job_id(request.id)) {
      refuse("id", "'id' is no name for a job",
             fmt::format("1 to {} letters, digits and . _ -, beginning with a letter, a digit or _",
                         kLongestJobId));
    }
  }
  request.command = text_of(member(json, "command"), "command");
  const CommandTable& table = table_of(request.command, rules);
  read_inputs(member(json, "inputs"), table, limits, request);
  if (json.contains("options")) read_options(json["options"], table, limits, request);
  return request;
}

/// One setting as the value it was read from.
nlohmann::ordered_json value_of(const JobOption& option) {
  switch (option.kind) {
    case OptionKind::kFlag:
      return true;
    case OptionKind::kReal:
    case OptionKind::kWhole:
      return nlohmann::ordered_json::parse(option.value);
    case OptionKind::kNumbers:
      return nlohmann::ordered_json::parse("[" + option.value + "]");
    case OptionKind::kText:
    case OptionKind::kTexts:
    case OptionKind::kPositional:
    case OptionKind::kPositionals:
      break;
  }
  return option.value;
}

}  // namespace

bool is_job_id(std::string_view id) {
  const auto allowed = [](char c) {
    return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') || c == '_' ||
           c == '.' || c == '-';
  };
  return !id.empty() && id.size() <= kLongestJobId && id[0] != '.' && id[0] != '-' &&
         std::all_of(id.begin(), id.end(), allowed);
}

Result<JobRequest> parse_request(std::string_view json, const RequestRules& rules, bool with_id,
                                 const RequestLimits& limits) {
  if (json.size() > limits.bytes) {
    return Status::bad_input("bad-request", fmt::format("a request of {} bytes is too long", json.size()), "",
                             fmt::format("at most {} bytes", limits.bytes));
  }
  const auto document = strict_json(json);
  if (!document.ok()) return document.status();
  try {
    JobRequest request = read_request(*document, rules, with_id, limits);
    if (rules.check) {
      if (Status status = rules.check(arguments_of(request)); !status.ok()) return status;
    }
    return request;
  } catch (const Refusal& refusal) {
    return refusal.status;
  }
}

std::vector<std::string> arguments_of(const JobRequest& request) {
  std::vector<std::string> arguments{request.command};
  for (const JobInput& input : request.inputs) {
    if (input.factor) {
      arguments.push_back(fmt::format("{}={}:{}", input.option, input.path, *input.factor));
    } else if (!input.option.empty()) {
      arguments.push_back(input.option + "=" + input.path);
    } else {
      arguments.push_back(input.path[0] == '-' ? fmt::format("./{}", input.path) : input.path);
    }
  }
  for (const JobOption& option : request.options) {
    arguments.push_back(option.value.empty() ? option.option : option.option + "=" + option.value);
  }
  return arguments;
}

std::string request_to_json(const JobRequest& request) {
  nlohmann::ordered_json json;
  json["id"] = request.id;
  json["command"] = request.command;
  auto& inputs = json["inputs"] = nlohmann::ordered_json::object();
  for (const JobInput& input : request.inputs) {
    if (input.factor) {
      inputs[input.key].push_back({{"path", input.path}, {"factor", *input.factor}});
    } else if (input.key == "steps") {
      inputs[input.key].push_back(input.path);
    } else {
      inputs[input.key] = input.path;
    }
  }
  auto& options = json["options"] = nlohmann::ordered_json::object();
  for (const JobOption& option : request.options) {
    if (option.kind == OptionKind::kTexts) {
      options[option.key].push_back(option.value);
    } else {
      options[option.key] = value_of(option);
    }
  }
  return json.dump(-1, ' ', false, nlohmann::ordered_json::error_handler_t::replace);
}

void resolve_inputs(JobRequest& request, const std::string& folder) {
  for (JobInput& input : request.inputs) {
    if (!std::filesystem::path(input.path).is_absolute() && !folder.empty()) {
      input.path = (std::filesystem::path(folder) / input.path).string();
    }
  }
}

}  // namespace stanchion
