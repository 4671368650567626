// Pages and shell completion, made from the declarations of the options.
#pragma once

#include <string>
#include <vector>

#include "model/option_table.hpp"

namespace stanchion::cli {

/// A page for `man`: of the program, or of the command `table`.
std::string man_page(const std::vector<CommandTable>& commands);
std::string man_page(const CommandTable& table);

std::string bash_completion(const std::vector<CommandTable>& commands);
std::string zsh_completion(const std::vector<CommandTable>& commands);
std::string fish_completion(const std::vector<CommandTable>& commands);

}  // namespace stanchion::cli
