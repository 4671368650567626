// The whole command line: which command was asked, with which options; help and version.
#pragma once

#include <memory>
#include <string>
#include <vector>

#include "cli/command.hpp"

namespace stanchion::cli {

/// Makes every command there is, each time anew: a command keeps what was typed.
using CommandFactory = std::vector<std::unique_ptr<Command>> (*)();

/// Parses `arguments` (without the program's name) and runs the command that was named. Prints help or the
/// version when these were asked. Failures come back unprinted.
Result<int> run_command_line(CommandFactory all_commands, const std::vector<std::string>& arguments);

/// The options of all commands as data, and the check of an argument vector.
RequestRules request_rules(CommandFactory all_commands);

}  // namespace stanchion::cli
