// Who may do what: a file of tokens with scopes.
#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "stanchion/status.hpp"

namespace stanchion::service {

/// Each includes those before it.
enum class Scope { kNone, kRead, kSubmit, kAdmin };

const char* name_of(Scope scope);

/// Immutable, thread safe. Holds digests only, never a token.
class Tokens {
 public:
  /// One token a line, "SCOPE TOKEN" with scope read, submit or admin; # begins a comment. A token has 24 to
  /// 200 visible characters. Bad usage: "bad-token-file" (with file and line; never with a token),
  /// "open-token-file" when others than the owner may read or write it. A credential of systemd
  /// (in $CREDENTIALS_DIRECTORY) may show the group as a reader.
  static Result<Tokens> load(const std::string& path);

  /// The scope of what an Authorization field says ("Bearer TOKEN"); kNone for an unknown token. The time
  /// does not depend on how much of a token is right, nor on which one it is.
  Scope scope_of(std::string_view authorization) const;

 private:
  struct Entry {
    std::string digest;
    Scope scope;
  };
  std::vector<Entry> entries_;
};

/// Compares every character, whatever the first ones are.
bool equal_in_constant_time(std::string_view left, std::string_view right);

}  // namespace stanchion::service
