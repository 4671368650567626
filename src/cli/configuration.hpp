// Options from elsewhere: a configuration file, overridden by the environment, overridden by what is typed.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "model/option_table.hpp"
#include "stanchion/status.hpp"

namespace stanchion::cli {

struct Configured {
  std::vector<std::string> arguments;  ///< as typed, without --config and --print-config, then what was added
  std::optional<std::string> print;    ///< with --print-config: what it prints
};

/// Adds to `typed` what the environment (STANCHION_MEMORY_CAP for --memory-cap) and the configuration file
/// ({"all": {"memory_cap": "8G"}, "serve": {"port": 8080}}) say about options that were not typed. The file
/// is
/// --config, else STANCHION_CONFIG, else stanchion/config.json in XDG_CONFIG_HOME (~/.config), else
/// /etc/stanchion/config.json, where they exist. Positional arguments and files that are read have to be
/// typed; a run with --progress-fd takes everything from its runner. Bad input "bad-config", "bad-json" or
/// "file-not-found"; bad usage "bad-config" for the environment.
Result<Configured> configure(const std::vector<CommandTable>& commands,
                             const std::vector<std::string>& typed);

}  // namespace stanchion::cli
