// The files of the page, read once at the start.
#pragma once

#include <map>
#include <string>

#include "service/http_message.hpp"
#include "stanchion/status.hpp"

namespace stanchion::service {

/// Immutable, thread safe.
class PageFiles {
 public:
  /// The files of `folder` whose names are made of letters, digits, . _ -; an empty folder name gives no
  /// page.
  static Result<PageFiles> load(const std::string& folder);

  /// The answer to a GET of `path` ("/" is index.html); status 404 when there is no such file.
  HttpResponse answer(const RequestHead& head) const;
  bool has(const std::string& path) const;

 private:
  struct File {
    std::string content_type, bytes, tag;
  };
  std::map<std::string, File> files_;  ///< by path
};

}  // namespace stanchion::service
