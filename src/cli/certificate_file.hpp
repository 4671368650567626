// `--certificate`: the claim of a run as a document that can be repeated.
#pragma once

#include <string>
#include <vector>

#include "report/certificate_json.hpp"

namespace stanchion::cli {

/// Digest of the file at `path` as it lies on the disk. Errors: those of opening it.
Result<std::string> digest_of_file(const std::string& path);

/// The files of `input` that are no matrices (those are digested where they are read), with digests. Call
/// before the work: what the certificate names must be readable. Errors: those of digest_of_file.
Result<std::vector<CertifiedFile>> certify_support_files(const Request& request);

/// The document for `outcome`, the answer to `request`.
CertificateDocument make_certificate(const Request& request, const Outcome& outcome,
                                     std::vector<CertifiedFile> support_files);

}  // namespace stanchion::cli
