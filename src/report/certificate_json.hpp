// A certificate as a document of its own: what was claimed, from which bytes, by which path, so that anyone
// can repeat it later. Schema version 1 is data/schemas/certificate-1.json.
#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "stanchion/outcome.hpp"
#include "stanchion/request.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// A file that the claim rests on. The numbers are known for matrices only.
struct CertifiedFile {
  std::string role;  ///< of InputRecord, or the option that named it: "dofs", "fix", "multipliers", ...
  std::string path;  ///< as given
  std::string absolute_path;
  std::string sha256;
  std::optional<Index> rows;
  std::optional<Offset> entries;
  std::optional<double> factor;
};

struct CertificateDocument {
  std::string program_version;  ///< that made it
  Request request;
  Outcome outcome;  ///< of check or count
  std::vector<CertifiedFile> files;
};

/// The document. Same conventions as to_json.
std::string certificate_to_json(const CertificateDocument& document);

/// Reads it back: the request with the paths as given, and of the outcome everything that a claim states
/// (warnings, times and work are left out). Error, bad input: "bad-certificate" at `path` with the member
/// that is missing, has the wrong type or is out of range.
Result<CertificateDocument> read_certificate(std::string_view text, const std::string& path);

}  // namespace stanchion
