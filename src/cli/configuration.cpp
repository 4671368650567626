#include "cli/configuration.hpp"

#include <fmt/format.h>
#include <unistd.h>

#include <algorithm>
#include <cctype>
#include <cstdlib>
#include <map>
#include <nlohmann/json.hpp>

#include "jobs/durable_file.hpp"
#include "jobs/strict_json.hpp"

namespace stanchion::cli {
namespace {

using Json = nlohmann::json;

constexpr const char* kEverywhere = "all";

bool configurable(const OptionEntry& option) {
  return option.kind != OptionKind::kPositional && option.kind != OptionKind::kPositionals &&
         option.use != OptionUse::kInput && option.key != "progress_fd";
}

std::string variable_of(const std::string& key) {
  std::string name = "STANCHION_" + key;
  std::transform(name.begin(), name.end(), name.begin(), [](unsigned char c) { return std::toupper(c); });
  return name;
}

std::string variable(const char* name) {
  const char* value = std::getenv(name);
  return value == nullptr ? "" : value;
}

Status bad_config(const std::string& path, const std::string& message) {
  return Status::bad_input(
      "bad-config", message, path,
      "`stanchion COMMAND --help` lists the options; keys have _ for -, without the dashes");
}

/// Takes `--config FILE` or `--config=FILE` out of the arguments.
Result<std::optional<std::string>> take_config(std::vector<std::string>& arguments) {
  for (auto word = arguments.begin(); word != arguments.end(); ++word) {
    if (word->rfind("--config=", 0) == 0) {
      std::string path = word->substr(9);
      arguments.erase(word);
      return std::optional<std::string>(std::move(path));
    }
    if (*word != "--config") continue;
    if (word + 1 == arguments.end()) {
      return Status::bad_usage("missing-argument", "--config needs a file", "command line", "name the file");
    }
    std::string path = *(word + 1);
    arguments.erase(word, word + 2);
    return std::optional<std::string>(std::move(path));
  }
  return std::optional<std::string>();
}

std::string usual_file() {
  std::string home = variable("XDG_CONFIG_HOME");
  if (home.empty() && !variable("HOME").empty()) home = variable("HOME") + "/.config";
  for (const std::string& folder : {home, std::string("/etc")}) {
    std::string path = folder + "/stanchion/config.json";
    if (!folder.empty() && ::access(path.c_str(), F_OK) == 0) return path;
  }
  return "";
}

/// The values of one option, as they would be typed; nothing for a flag that is off.
Result<std::vector<std::string>> words_of(const OptionEntry& option, const Json& value,
                                          const std::string& path) {
  const auto one = [](const Json& item) { return item.is_string() ? item.get<std::string>() : item.dump(); };
  if (option.kind == OptionKind::kFlag) {
    if (!value.is_boolean()) return bad_config(path, fmt::format("'{}' has to be true or false", option.key));
    return value.get<bool>() ? std::vector<std::string>{option.name} : std::vector<std::string>{};
  }
  const bool several = option.kind == OptionKind::kTexts || option.kind == OptionKind::kNumbers;
  std::vector<std::string> words;
  for (const Json& item : value.is_array() && several ? value : Json::array({value})) {
    const std::string text = item.is_string() || item.is_number() ? one(item) : "";
    if (text.empty()) return bad_config(path, fmt::format("'{}' has to be a text or a number", option.key));
    words.push_back(option.name + "=" + text);
  }
  return words;
}

Status check_file(const Json& file, const std::vector<CommandTable>& commands, const std::string& path) {
  if (!file.is_object()) return bad_config(path, "the configuration is a JSON object");
  for (const auto& [section, options] : file.items()) {
    const std::string& name = section;
    if (!options.is_object()) return bad_config(path, fmt::format("'{}' has to be an object", name));
    const bool known =
        name == kEverywhere || std::any_of(commands.begin(), commands.end(),
                                           [&name](const auto& table) { return table.name == name; });
    if (!known) return bad_config(path, fmt::format("'{}' is no command, and not 'all'", name));
    for (const auto& [key, value] : options.items()) {
      const std::string& wanted = key;
      const bool option = std::any_of(commands.begin(), commands.end(), [&](const CommandTable& table) {
        const OptionEntry* entry = table.find_key(wanted);
        return (name == kEverywhere || table.name == name) && entry != nullptr && configurable(*entry);
      });
      if (!option)
        return bad_config(path, fmt::format("'{}' is no option that '{}' can configure", wanted, name));
    }
  }
  return {};
}

/// What was typed for `option`; the values are kept for --print-config.
std::vector<std::string> typed_for(const OptionEntry& option, const std::vector<std::string>& typed) {
  std::vector<std::string> words;
  for (std::size_t k = 0; k < typed.size(); ++k) {
    if (typed[k] == option.name) {
      words.push_back(option.kind != OptionKind::kFlag && k + 1 < typed.size() ? typed[k] + "=" + typed[k + 1]
                                                                               : typed[k]);
    } else if (typed[k].rfind(option.name + "=", 0) == 0) {
      words.push_back(typed[k]);
    }
  }
  return words;
}

/// An environment variable as the value that it stands for.
Json value_of(const OptionEntry& option, const std::string& text) {
  if (option.kind != OptionKind::kFlag) return text;
  if (text == "1" || text == "true") return true;
  if (text == "0" || text == "false") return false;
  return text;
}

}  // namespace

Result<Configured> configure(const std::vector<CommandTable>& commands,
                             const std::vector<std::string>& typed) {
  Configured configured;
  configured.arguments = typed;
  auto& arguments = configured.arguments;
  const auto named = take_config(arguments);
  if (!named.ok()) return named.status();
  const auto printing = std::find(arguments.begin(), arguments.end(), "--print-config");
  const bool print = printing != arguments.end();
  if (print) arguments.erase(printing);
  const auto command =
      std::find_if(commands.begin(), commands.end(), [&arguments](const CommandTable& table) {
        return !arguments.empty() && table.name == arguments.front();
      });
  if (command == commands.end()) {
    if (!print) return configured;
    return Status::bad_usage("missing-argument", "no command was given", "--print-config",
                             "write e.g. stanchion check --print-config");
  }
  const bool child = std::any_of(arguments.begin(), arguments.end(),
                                 [](const std::string& word) { return word.rfind("--progress-fd", 0) == 0; });
  if (child) return configured;

  std::string path = named->value_or(variable("STANCHION_CONFIG"));
  if (path.empty()) path = usual_file();
  Json file = Json::object();
  if (!path.empty()) {
    const auto bytes = read_whole(path);
    if (!bytes)
      return Status::bad_input("file-not-found", "the configuration cannot be read", path, "check the name");
    const auto read = strict_json(*bytes);
    if (!read.ok()) return Status::bad_input("bad-json", read.status().message(), path, "mend the JSON");
    if (Status sound = check_file(*read, commands, path); !sound.ok()) return sound;
    file = *read;
  }

  const std::vector<std::string> own = arguments;
  nlohmann::ordered_json printed = nlohmann::ordered_json::object();
  for (const OptionEntry& option : command->options) {
    if (!configurable(option)) continue;
    std::string from = "typed";
    std::vector<std::string> words = typed_for(option, own);
    const std::string in_environment = variable(variable_of(option.key).c_str());
    if (words.empty()) {
      Json value;
      if (!in_environment.empty()) {
        from = "environment " + variable_of(option.key);
        value = value_of(option, in_environment);
      } else {
        for (const std::string& section : {command->name, std::string(kEverywhere)}) {
          if (!value.is_null() || !file.contains(section) || !file[section].contains(option.key)) continue;
          value = file[section][option.key];
          from = "file " + path;
        }
      }
      if (value.is_null()) continue;
      const auto added = words_of(option, value, in_environment.empty() ? path : variable_of(option.key));
      if (!added.ok()) return added.status();
      words = *added;
      arguments.insert(arguments.end(), words.begin(), words.end());
    }
    for (std::string& word : words) {
      word = word.size() > option.name.size() ? word.substr(option.name.size() + 1) : "true";
    }
    printed[option.key] = {{"value", words}, {"from", from}};
  }
  if (print) {
    const nlohmann::ordered_json document{
        {"command", command->name},
        {"file", path.empty() ? nlohmann::ordered_json(nullptr) : nlohmann::ordered_json(path)},
        {"options", printed}};
    configured.print = document.dump(2, ' ', false, nlohmann::ordered_json::error_handler_t::replace) + "\n";
  }
  return configured;
}

}  // namespace stanchion::cli
