// What `recheck` found, as text and as a JSON document (data/schemas/recheck-1.json).
#pragma once

#include <string>
#include <vector>

#include "model/claims.hpp"
#include "stanchion/outcome.hpp"

namespace stanchion {

struct RecheckReport {
  std::string certificate_path, certificate_sha256;
  std::string made_by;  ///< version of the program that wrote the certificate
  std::vector<std::string> arguments;
  std::vector<ClaimComparison> claims;
  Outcome claimed;  ///< as far as the certificate tells
  Outcome found;    ///< by the second path
};

std::string recheck_to_text(const RecheckReport& report);

/// Same conventions as to_json.
std::string recheck_to_json(const RecheckReport& report);

}  // namespace stanchion
