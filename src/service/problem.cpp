#include "service/problem.hpp"

#include <nlohmann/json.hpp>

namespace stanchion::service {
namespace {

const char* title_of(int status) {
  switch (status) {
    case 400:
      return "The request was not accepted";
    case 401:
      return "A token is needed";
    case 403:
      return "Not allowed";
    case 404:
      return "Not there";
    case 405:
      return "Not with this method";
    case 408:
      return "The request took too long";
    case 409:
      return "Not in this state";
    case 411:
      return "The length is missing";
    case 413:
      return "Too large";
    case 414:
      return "The target is too long";
    case 415:
      return "Another kind of content is asked for";
    case 417:
      return "Not to be expected";
    case 421:
      return "Meant for another host";
    case 422:
      return "It cannot be done";
    case 429:
      return "Too many requests";
    case 431:
      return "The head is too long";
    case 500:
      return "A defect of the program";
    case 501:
      return "Not known";
    case 503:
      return "Not now";
    case 505:
      return "Another version of HTTP";
    case 507:
      return "No room";
    default:
      return "It was not done";
  }
}

}  // namespace

std::string problem_to_text(const JobProblem& problem) {
  nlohmann::ordered_json json;
  json["type"] = "urn:stanchion:problem:" + problem.code;
  json["title"] = title_of(problem.status);
  json["status"] = problem.status;
  json["detail"] = problem.detail;
  json["code"] = problem.code;
  if (!problem.place.empty()) json["place"] = problem.place;
  if (!problem.remedy.empty()) json["remedy"] = problem.remedy;
  return json.dump(-1, ' ', false, nlohmann::ordered_json::error_handler_t::replace);
}

HttpResponse problem_response(const JobProblem& problem) {
  HttpResponse response;
  response.status = problem.status;
  response.content_type = "application/problem+json";
  response.body = problem_to_text(problem) + "\n";
  if (problem.status == 429 || problem.status == 503) response.fields.emplace_back("Retry-After", "1");
  if (problem.status == 401) response.fields.emplace_back("WWW-Authenticate", "Bearer realm=\"stanchion\"");
  return response;
}

HttpResponse problem_response(int status, std::string code, std::string detail, std::string remedy,
                              std::string place) {
  return problem_response({status, std::move(code), std::move(detail), std::move(place), std::move(remedy)});
}

HttpResponse problem_response(const Status& status) {
  int code = 500;
  if (status.kind() == StatusKind::kBadUsage || status.kind() == StatusKind::kBadInput) code = 400;
  if (status.kind() == StatusKind::kResourceLimit) code = status.code() == "disk-full" ? 507 : 503;
  return problem_response({code, status.code(), status.message(), status.place(), status.remedy()});
}

std::string printable(const std::string& text) {
  const std::string json =
      nlohmann::json(text).dump(-1, ' ', false, nlohmann::json::error_handler_t::replace);
  return nlohmann::json::parse(json).get<std::string>();
}

}  // namespace stanchion::service
