#include "jobs/request_schema.hpp"

#include <fmt/format.h>

#include <nlohmann/json.hpp>

namespace stanchion {
namespace {

using Json = nlohmann::ordered_json;

Json object_of(const Json& properties, const Json& required) {
  Json object{{"type", "object"}, {"properties", properties}};
  if (!required.empty()) object["required"] = required;
  object["additionalProperties"] = false;
  return object;
}

Json one_or_list(const Json& item) {
  const Json list{{"type", "array"}, {"items", item}, {"minItems", 1}};
  return Json{{"oneOf", Json::array({item, list})}};
}

Json text() {
  return Json{{"type", "string"}, {"minLength", 1}};
}

Json type_of(const OptionEntry& option) {
  switch (option.kind) {
    case OptionKind::kFlag:
      return Json{{"type", "boolean"}};
    case OptionKind::kReal:
      return Json{{"type", "number"}};
    case OptionKind::kWhole:
      return Json{{"type", "integer"}};
    case OptionKind::kNumbers:
      return one_or_list(Json{{"type", "number"}});
    case OptionKind::kTexts:
      return one_or_list(text());
    case OptionKind::kText:
    case OptionKind::kPositional:
    case OptionKind::kPositionals:
      break;
  }
  const auto choices = choices_of(option);
  return choices.empty() ? text() : Json{{"enum", choices}};
}

Json file_of(const OptionEntry& option) {
  if (option.kind == OptionKind::kPositionals)
    return Json{{"type", "array"}, {"items", text()}, {"minItems", 1}};
  if (option.kind != OptionKind::kTexts) return text();
  const Json added = object_of({{"path", text()}, {"factor", {{"type", "number"}}}}, {"path", "factor"});
  return Json{{"type", "array"}, {"items", added}, {"minItems", 1}};
}

Json of_command(const CommandTable& table) {
  Json inputs = Json::object(), options = Json::object();
  for (const OptionEntry& option : table.options) {
    const bool input = option.use == OptionUse::kInput;
    if (!input && option.use != OptionUse::kSetting) continue;
    Json described = input ? file_of(option) : type_of(option);
    described["description"] = option.help;
    (input ? inputs : options)[option.key] = std::move(described);
  }
  return Json{{"description", table.summary},
              {"properties",
               {{"command", {{"const", table.name}}},
                {"inputs", object_of(inputs, {"stiffness"})},
                {"options", object_of(options, Json::array())}}}};
}

}  // namespace

std::string request_schema(const RequestRules& rules) {
  Json names = Json::array(), commands = Json::array();
  for (const CommandTable& table : rules.commands) {
    if (!table.requestable) continue;
    names.push_back(table.name);
    commands.push_back(of_command(table));
  }
  Json schema;
  schema["$schema"] = "https://json-schema.org/draft/2020-12/schema";
  schema["title"] =
      "One request: a line of the file that batch reads, or the body of a job that is submitted";
  schema["description"] =
      "Relative paths count from the folder of the file that holds the request. Options have the names of "
      "the "
      "command line without dashes, with _ for -. Made by `stanchion describe request-schema`.";
  schema["type"] = "object";
  schema["required"] = {"id", "command", "inputs"};
  schema["properties"] = {
      {"id",
       {{"type", "string"},
        {"pattern", fmt::format("^[A-Za-z0-9_][A-Za-z0-9_.-]{{0,{}}}$", kLongestJobId - 1)},
        {"description", "unique in its file; files are named after it"}}},
      {"command", {{"enum", names}}},
      {"inputs", {{"type", "object"}}},
      {"options", {{"type", "object"}}}};
  schema["additionalProperties"] = false;
  schema["oneOf"] = commands;
  return schema.dump(1) + "\n";
}

}  // namespace stanchion
