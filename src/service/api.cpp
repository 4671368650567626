#include "service/api.hpp"

#include <fmt/format.h>

#include <chrono>
#include <nlohmann/json.hpp>

#include "jobs/durable_file.hpp"
#include "service/problem.hpp"

namespace stanchion::service {
namespace {

using Clock = std::chrono::steady_clock;

std::vector<std::string_view> parts_of(std::string_view path) {
  std::vector<std::string_view> parts;
  while (!path.empty()) {
    path.remove_prefix(1);
    const std::size_t end = std::min(path.find('/'), path.size());
    parts.push_back(path.substr(0, end));
    path.remove_prefix(end);
  }
  return parts;
}

/// Whether `path` is of the form `pattern`; the parts at its stars go to `stars`.
bool matches(const std::string& path, const char* pattern, std::vector<std::string>& stars) {
  const auto have = parts_of(path), want = parts_of(pattern);
  stars.clear();
  if (have.size() != want.size()) return false;
  for (std::size_t k = 0; k < have.size(); ++k) {
    if (want[k] == "*") {
      stars.emplace_back(have[k]);
    } else if (want[k] != have[k]) {
      return false;
    }
  }
  return true;
}

bool is_open_path(const std::string& path) {
  return path == "/live" || path == "/ready" || path == "/v1/service" || path == "/v1/openapi.json";
}

void add_security_fields(HttpResponse& response) {
  response.fields.emplace_back("X-Content-Type-Options", "nosniff");
  response.fields.emplace_back("Referrer-Policy", "no-referrer");
  response.fields.emplace_back("X-Frame-Options", "DENY");
  response.fields.emplace_back("Cross-Origin-Resource-Policy", "same-origin");
  response.fields.emplace_back("Cross-Origin-Opener-Policy", "same-origin");
  bool has_policy = false, has_cache = false;
  for (const auto& [name, value] : response.fields) {
    has_policy = has_policy || name == "Content-Security-Policy";
    has_cache = has_cache || name == "Cache-Control";
  }
  if (!has_policy) {
    response.fields.emplace_back(
        "Content-Security-Policy",
        "default-src 'none'; frame-ancestors 'none'; base-uri 'none'; form-action 'none'");
  }
  if (!has_cache) response.fields.emplace_back("Cache-Control", "no-store");
}

}  // namespace

HttpResponse json_response(int status, const nlohmann::ordered_json& json) {
  HttpResponse response;
  response.status = status;
  response.content_type = "application/json";
  response.body = json.dump(-1, ' ', false, nlohmann::ordered_json::error_handler_t::replace) + "\n";
  return response;
}

Api::Api(ApiParts parts)
    : parts_(std::move(parts)),
      rate_(parts_.options.requests_per_second, 2 * parts_.options.requests_per_second) {
  description_ = read_whole(parts_.options.description).value_or("");
}

const std::vector<Api::Route>& Api::routes() {
  static const std::vector<Route> all = {
      {"POST", "/v1/jobs", &Api::submit, Scope::kSubmit},
      {"GET", "/v1/jobs", &Api::list_jobs, Scope::kRead},
      {"GET", "/v1/jobs/*", &Api::get_job, Scope::kRead},
      {"DELETE", "/v1/jobs/*", &Api::delete_job, Scope::kAdmin},
      {"POST", "/v1/jobs/*/cancel", &Api::cancel_job, Scope::kSubmit},
      {"GET", "/v1/jobs/*/events", &Api::job_events, Scope::kRead},
      {"GET", "/v1/jobs/*/*", &Api::get_file, Scope::kRead},
      {"GET", "/v1/events", &Api::all_events, Scope::kRead},
      {"POST", "/v1/inputs", &Api::upload, Scope::kSubmit},
      {"PUT", "/v1/inputs/*", &Api::upload, Scope::kSubmit},
      {"GET", "/v1/inputs", &Api::list_inputs, Scope::kRead},
      {"GET", "/v1/inputs/*", &Api::get_input, Scope::kRead},
      {"DELETE", "/v1/inputs/*", &Api::delete_input, Scope::kAdmin},
      {"GET", "/v1/analyses", &Api::list_analyses, Scope::kRead},
      {"GET", "/v1/files", &Api::list_files, Scope::kRead},
      {"GET", "/v1/commands", &Api::list_commands, Scope::kRead},
      {"GET", "/v1/service", &Api::service_facts, Scope::kNone},
      {"GET", "/v1/openapi.json", &Api::description, Scope::kNone},
      {"GET", "/live", &Api::live, Scope::kNone},
      {"GET", "/ready", &Api::ready, Scope::kNone},
      {"GET", "/metrics", &Api::metrics, Scope::kRead},
  };
  return all;
}

Scope Api::scope_of(const RequestHead& head) const {
  return parts_.tokens ? parts_.tokens->scope_of(head.field("authorization")) : Scope::kAdmin;
}

std::optional<HttpResponse> Api::refuse(const HttpRequest& request, bool is_page) const {
  switch (judge_origin(request.head, parts_.origin, is_page)) {
    case OriginVerdict::kFine:
      break;
    case OriginVerdict::kWrongHost:
      return problem_response(421, "wrong-host", "the field Host names another host than this service",
                              "ask for it by its address, or start it with --public-name NAME", "Host");
    case OriginVerdict::kOtherSite:
      return problem_response(403, "other-site", "a page of another web site asks",
                              "use the service's own page", "Origin");
  }
  if (!request.head.field("content-encoding").empty() && request.head.has_body()) {
    return problem_response(415, "content-encoding", "bodies are taken as they are, without Content-Encoding",
                            "send the file itself; it may be a .gz file", "Content-Encoding");
  }
  return std::nullopt;
}

HttpResponse Api::route(const HttpRequest& request, std::string& label) {
  const RequestHead& head = request.head;
  const bool is_api = head.path.rfind("/v1/", 0) == 0 || head.path == "/metrics" || is_open_path(head.path);
  if (auto refusal = refuse(request, !is_api)) return std::move(*refusal);
  const bool reads = head.method == "GET" || head.method == "HEAD";
  if (!is_api) {
    label = "page";
    if (parts_.page.has(head.path) && !reads) {
      auto response = problem_response(405, "method-not-allowed", "the page is read only");
      response.fields.emplace_back("Allow", "GET, HEAD");
      return response;
    }
    return parts_.page.answer(head);
  }
  std::vector<std::string> stars;
  std::string allowed;
  for (const Route& entry : routes()) {
    if (!matches(head.path, entry.path, stars)) continue;
    if (entry.method != head.method && !(head.method == "HEAD" && std::string_view(entry.method) == "GET")) {
      allowed += (allowed.empty() ? "" : ", ") + std::string(entry.method);
      continue;
    }
    label = std::string(entry.method) + " " + entry.path;
    const Scope scope = scope_of(head);
    if (scope == Scope::kNone && entry.scope != Scope::kNone) {
      return problem_response(401, "token-needed", "a token is needed, or this one is not known",
                              "send Authorization: Bearer TOKEN", "Authorization");
    }
    if (scope < entry.scope) {
      return problem_response(
          403, "scope",
          fmt::format("this token may not do that; it takes the scope {}", service::name_of(entry.scope)),
          "use another token", "Authorization");
    }
    return (this->*entry.handler)(
        {request, scope, stars.empty() ? "" : stars[0], stars.size() > 1 ? stars[1] : ""});
  }
  if (!allowed.empty()) {
    auto response = problem_response(405, "method-not-allowed", "not with this method", "use " + allowed);
    response.fields.emplace_back("Allow", allowed);
    return response;
  }
  return problem_response(404, "not-found", "there is nothing at this path",
                          "GET /v1/openapi.json lists the paths");
}

HttpResponse Api::answer(const HttpRequest& request) {
  const auto began = Clock::now();
  std::string label = "other";
  HttpResponse response = rate_.allow(request.peer, began)
                              ? route(request, label)
                              : problem_response(429, "too-many-requests", "too many requests a second",
                                                 "wait a moment, or raise --rate");
  add_security_fields(response);
  if (!response.stream) {
    figures_.count(label, response.status, std::chrono::duration<double>(Clock::now() - began).count());
  }
  return response;
}

Result<std::string> Api::read_text(const HttpRequest& request, HttpResponse& refusal) const {
  const auto most = static_cast<std::uint64_t>(parts_.options.request_bytes);
  const auto too_long = [&] {
    refusal = problem_response(413, "request-too-long", fmt::format("a request has at most {} bytes", most),
                               "split the job");
    return Status::bad_input("request-too-long", "", "", "");
  };
  if (request.head.content_length.value_or(0) > most) return too_long();
  std::string text;
  const bool whole = request.read_body([&](std::string_view piece) {
    text += piece;
    return text.size() <= most;
  });
  if (text.size() > most) return too_long();
  if (!whole) {
    refusal = problem_response(400, "bad-request", "the body broke off");
    return Status::bad_input("bad-request", "", "", "");
  }
  return text;
}

HttpResponse Api::live(const Call&) {
  return json_response(200, {{"live", true}});
}

HttpResponse Api::ready(const Call&) {
  if (closing_) return problem_response(503, "closing", "the service is being shut down");
  // Where nobody submits because the service is not ready, nothing but this would find out that it is.
  if (!parts_.journal.figures().healthy &&
      !parts_.journal.write([](JobTable& table) { table.touch(); }).ok()) {
    return problem_response(503, "store", "the job store cannot be written",
                            "look after the disk that holds it");
  }
  return json_response(200, {{"ready", true}});
}

HttpResponse Api::description(const Call&) {
  HttpResponse response;
  response.content_type = "application/json";
  response.body = description_;
  if (description_.empty()) return problem_response(404, "not-found", "the description was not installed");
  return response;
}

}  // namespace stanchion::service
