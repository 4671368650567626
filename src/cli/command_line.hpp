// The whole command line: which command was asked, with which options; help and version.
#pragma once

#include <memory>
#include <string>
#include <vector>

#include "cli/command.hpp"

namespace stanchion::cli {

/// Parses `arguments` (without the program's name) against `commands` and runs the one that was named. Prints
/// help or the version when these were asked. Failures come back unprinted.
Result<int> run_command_line(const std::vector<std::unique_ptr<Command>>& commands,
                             const std::vector<std::string>& arguments);

}  // namespace stanchion::cli
