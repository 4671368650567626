#include "cli/certificate_file.hpp"

#include <filesystem>
#include <system_error>

#include "base/digest.hpp"
#include "base/mapped_file.hpp"
#include "model/input_files.hpp"
#include "model/version.hpp"

namespace stanchion::cli {
namespace {

std::string absolute_path(const std::string& path) {
  std::error_code failure;
  const auto absolute = std::filesystem::absolute(path, failure);
  return failure ? path : absolute.lexically_normal().string();
}

}  // namespace

Result<std::string> digest_of_file(const std::string& path) {
  const auto file = MappedFile::open(path);
  if (!file.ok()) return file.status();
  return sha256(file->bytes());
}

Result<std::vector<CertifiedFile>> certify_support_files(const Request& request) {
  std::vector<CertifiedFile> files;
  std::vector<InputFile> named = input_files(request.input);
  if (!request.audit.values.empty()) named.push_back({"values", request.audit.values, false});
  for (const InputFile& file : named) {
    if (file.matrix) continue;
    const auto digest = digest_of_file(file.path);
    if (!digest.ok()) return digest.status();
    files.push_back({file.role, file.path, absolute_path(file.path), *digest, {}, {}, {}});
  }
  return files;
}

CertificateDocument make_certificate(const Request& request, const Outcome& outcome,
                                     std::vector<CertifiedFile> support_files) {
  CertificateDocument document{program_version(), request, outcome, {}};
  for (const InputRecord& input : outcome.inputs) {
    document.files.push_back({input.role, input.path, absolute_path(input.path), input.sha256, input.rows,
                              input.entries, input.factor});
  }
  for (CertifiedFile& file : support_files) document.files.push_back(std::move(file));
  return document;
}

}  // namespace stanchion::cli
