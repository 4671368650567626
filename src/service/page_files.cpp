#include "service/page_files.hpp"

#include <fmt/format.h>

#include <filesystem>

#include "base/digest.hpp"
#include "jobs/durable_file.hpp"
#include "service/problem.hpp"

namespace stanchion::service {
namespace {

std::string type_of(const std::string& extension) {
  if (extension == ".html") return "text/html; charset=utf-8";
  if (extension == ".js" || extension == ".mjs") return "text/javascript; charset=utf-8";
  if (extension == ".css") return "text/css; charset=utf-8";
  if (extension == ".svg") return "image/svg+xml";
  if (extension == ".png") return "image/png";
  if (extension == ".ico") return "image/x-icon";
  if (extension == ".woff2") return "font/woff2";
  if (extension == ".json") return "application/json";
  return "";
}

}  // namespace

Result<PageFiles> PageFiles::load(const std::string& folder) {
  PageFiles page;
  if (folder.empty()) return page;
  std::error_code failure;
  for (const auto& entry : std::filesystem::directory_iterator(folder, failure)) {
    const std::string name = entry.path().filename().string();
    const std::string type = type_of(entry.path().extension().string());
    if (type.empty() || name[0] == '.' || !entry.is_regular_file()) continue;
    auto bytes = read_whole(entry.path().string());
    if (!bytes) continue;
    const std::string tag = fmt::format("\"{}\"", sha256(*bytes).substr(0, 32));
    page.files_[name == "index.html" ? "/" : "/" + name] = {type, std::move(*bytes), tag};
  }
  if (failure || page.files_.count("/") == 0) {
    return Status::bad_usage("no-page", "this folder holds no index.html", folder, "name the page's folder");
  }
  return page;
}

bool PageFiles::has(const std::string& path) const {
  return files_.count(path) != 0;
}

HttpResponse PageFiles::answer(const RequestHead& head) const {
  const auto found = files_.find(head.path);
  if (found == files_.end()) return problem_response(404, "not-found", "there is nothing at this path");
  const File& file = found->second;
  HttpResponse response;
  response.fields = {{"Content-Security-Policy",
                      "default-src 'none'; script-src 'self'; style-src 'self'; img-src 'self' data: blob:; "
                      "connect-src 'self'; "
                      "base-uri 'none'; form-action 'none'; frame-ancestors 'none'"},
                     {"Cache-Control", "no-cache"},
                     {"ETag", file.tag}};
  if (head.field("if-none-match") == file.tag) {
    response.status = 304;
    return response;
  }
  response.content_type = file.content_type;
  response.body = file.bytes;
  return response;
}

}  // namespace stanchion::service
