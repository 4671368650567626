// The input files that a certificate names, found again and verified.
#pragma once

#include <optional>
#include <string>

#include "cli/answer_file.hpp"
#include "report/certificate_json.hpp"

namespace stanchion::cli {

/// Looks every file up: below `root` when given, else where it was (absolute path), else as it was named.
/// The first place with the right digest is taken, and the request is made to point there. Errors, bad input:
/// "input-changed" when only files with other bytes are found; "input-not-found".
Status find_inputs(CertificateDocument& document, const std::optional<std::string>& root);

/// Bad input "input-changed" at `path`.
Status input_changed(const std::string& path);

/// The place for the JSON, opened ahead of the work. Bad usage when it would overwrite the certificate or a
/// file that it names.
Result<std::optional<AnswerFile>> open_recheck_answer(const std::optional<std::string>& target,
                                                      const std::string& certificate,
                                                      const CertificateDocument& document);

}  // namespace stanchion::cli
