#include "service/tokens.hpp"

#include <sys/stat.h>

#include <algorithm>
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <sstream>

#include "base/digest.hpp"

namespace stanchion::service {
namespace {

Scope scope_named(const std::string& name) {
  for (const Scope scope : {Scope::kRead, Scope::kSubmit, Scope::kAdmin}) {
    if (name == name_of(scope)) return scope;
  }
  return Scope::kNone;
}

bool is_token(const std::string& text) {
  return text.size() >= 24 && text.size() <= 200 &&
         std::all_of(text.begin(), text.end(), [](char c) { return c > ' ' && c < 0x7f; });
}

/// Whether systemd has put the file there as a credential of this service, in a folder that is the service's
/// alone (systemd.exec(5)). What stands there for the group is then the mask of an access list that names the
/// service's user.
bool is_credential(const std::string& path) {
  const char* folder = std::getenv("CREDENTIALS_DIRECTORY");
  if (folder == nullptr || *folder == '\0') return false;
  std::error_code failure;
  const auto real = std::filesystem::canonical(path, failure);
  if (failure) return false;
  const auto credentials = std::filesystem::canonical(folder, failure);
  return !failure && real.parent_path() == credentials;
}

/// Whether nobody but its owner may read or write it.
bool is_private(const std::string& path, mode_t mode) {
  const mode_t others = mode & (S_IRWXG | S_IRWXO);
  return others == 0 || (others == S_IRGRP && is_credential(path));
}

}  // namespace

const char* name_of(Scope scope) {
  switch (scope) {
    case Scope::kNone:
      return "none";
    case Scope::kRead:
      return "read";
    case Scope::kSubmit:
      return "submit";
    case Scope::kAdmin:
      return "admin";
  }
  return "";
}

Result<Tokens> Tokens::load(const std::string& path) {
  struct stat facts {};
  std::ifstream file(path);
  if (!file || ::stat(path.c_str(), &facts) != 0 || !S_ISREG(facts.st_mode)) {
    return Status::bad_usage("bad-token-file", "the token file cannot be read", path,
                             "name a file of tokens");
  }
  if (!is_private(path, facts.st_mode)) {
    return Status::bad_usage("open-token-file", "others than its owner may read or write the token file",
                             path, "chmod 600 " + path);
  }
  Tokens tokens;
  std::string line;
  for (int number = 1; std::getline(file, line); ++number) {
    std::istringstream words(line.substr(0, line.find('#')));
    std::string scope, token, more;
    if (!(words >> scope)) continue;
    words >> token;
    if (scope_named(scope) == Scope::kNone || !is_token(token) || (words >> more)) {
      return Status::bad_usage("bad-token-file", "this line is not a scope and a token",
                               path + ":" + std::to_string(number),
                               "write: read, submit or admin, then a token of 24 to 200 characters, for "
                               "instance from: openssl rand -hex 24");
    }
    tokens.entries_.push_back({sha256(token), scope_named(scope)});
  }
  if (tokens.entries_.empty()) {
    return Status::bad_usage("bad-token-file", "the token file holds no token", path,
                             "write a line: admin, and a token of 24 to 200 characters");
  }
  return tokens;
}

Scope Tokens::scope_of(std::string_view authorization) const {
  constexpr std::string_view kScheme = "Bearer ";
  if (authorization.size() <= kScheme.size()) return Scope::kNone;
  std::string scheme(authorization.substr(0, kScheme.size()));
  std::transform(scheme.begin() + 1, scheme.end(), scheme.begin() + 1,
                 [](char c) { return c >= 'A' && c <= 'Z' ? static_cast<char>(c - 'A' + 'a') : c; });
  if (scheme != kScheme) return Scope::kNone;
  const std::string digest = sha256(authorization.substr(kScheme.size()));
  Scope scope = Scope::kNone;
  for (const Entry& entry : entries_) {
    if (equal_in_constant_time(entry.digest, digest)) scope = std::max(scope, entry.scope);
  }
  return scope;
}

bool equal_in_constant_time(std::string_view left, std::string_view right) {
  if (left.size() != right.size()) return false;
  volatile unsigned char difference = 0;
  for (std::size_t k = 0; k < left.size(); ++k) {
    difference = static_cast<unsigned char>(difference | (left[k] ^ right[k]));
  }
  return difference == 0;
}

}  // namespace stanchion::service
