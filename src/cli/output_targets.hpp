// Files to be written, made sure of before the work: none may destroy what is read or another answer.
#pragma once

#include <optional>
#include <string>
#include <utility>
#include <vector>

#include "cli/answer_file.hpp"
#include "stanchion/request.hpp"

namespace stanchion::cli {

/// Opens `target`, named by `option`; nothing when it is absent or "-". Bad usage "contradiction" when it is
/// one of the files in `read`; "cannot-write" when nothing can be written there.
Result<std::optional<AnswerFile>> open_target(const std::string& option,
                                              const std::optional<std::string>& target,
                                              const std::vector<std::string>& read);

/// Bad usage "contradiction" when `target`, named by `option`, is one of the files in `read`.
Status check_not_read(const std::string& option, const std::optional<std::string>& target,
                      const std::vector<std::string>& read);

/// Every file that `input` names.
std::vector<std::string> files_read(const InputRequest& input);

/// An option with the file it names, if given.
using NamedTarget = std::pair<std::string, std::optional<std::string>>;

/// Bad usage "contradiction" when two options name one file.
Status check_targets_differ(const std::vector<NamedTarget>& targets);

}  // namespace stanchion::cli
