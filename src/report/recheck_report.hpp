// What `recheck` found, as text and as a JSON document (data/schemas/recheck-1.json).
#pragma once

#include <string>
#include <vector>

#include "model/library_count.hpp"
#include "stanchion/outcome.hpp"

namespace stanchion {

struct RecheckReport {
  std::string certificate_path, certificate_sha256;
  std::string made_by;  ///< version of the program that wrote the certificate
  std::vector<std::string> arguments;
  std::vector<ClaimComparison> claims;
  Outcome claimed;  ///< as far as the certificate tells
  Outcome found;    ///< by the second path
  std::optional<LibraryComparison> library =
      std::nullopt;  ///< what another library says, where one was asked
};

/// The worst of all claims, and of the other library's counts.
Agreement agreement_of(const RecheckReport& report);

std::string recheck_to_text(const RecheckReport& report);

/// Same conventions as to_json.
std::string recheck_to_json(const RecheckReport& report);

}  // namespace stanchion
