// The options of every command as plain data: what the help, requests, configuration, man pages and shell
// completion are made from, filled where the command line declares its options.
#pragma once

#include <string>
#include <vector>

namespace stanchion {

enum class OptionKind {
  kPositional,
  kPositionals,  ///< all that follow
  kFlag,
  kText,
  kTexts,  ///< may be given several times
  kReal,
  kWhole,
  kNumbers,  ///< comma separated, may be given several times
};

enum class OptionUse {
  kSetting,  ///< shapes the question or its answer
  kInput,    ///< names a file that is read
  kOutput,   ///< names a file that is written
  kRunner,   ///< for whoever runs the program, no part of a question
};

struct OptionEntry {
  std::string name;   ///< as typed: "--memory-cap"; of a positional its place, "K"
  std::string key;    ///< in requests and configuration: "memory_cap"
  std::string value;  ///< what follows it, in words: "SIZE", "plus|minus"; empty for flags
  std::string help;
  std::string group;
  OptionKind kind = OptionKind::kFlag;
  OptionUse use = OptionUse::kSetting;
  bool required = false;
};

struct CommandTable {
  std::string name, summary, closing;
  bool requestable = false;  ///< a job may ask for it
  std::vector<OptionEntry> options;

  /// Null when there is none.
  const OptionEntry* find_key(const std::string& key) const;
};

/// The words that "plus|minus" allows; none when any text goes.
std::vector<std::string> choices_of(const OptionEntry& option);

}  // namespace stanchion
