// Uploads, and files under the roots.
#include <fmt/format.h>

#include "service/api.hpp"
#include "service/api_parameters.hpp"
#include "service/problem.hpp"

namespace stanchion::service {
namespace {

using Json = nlohmann::ordered_json;

constexpr std::size_t kMostEntries = 5000;

Json input_to_json(const InputRecord& input, bool known) {
  return {{"digest", input.digest},
          {"bytes", input.bytes},
          {"name", input.name ? Json(*input.name) : Json(nullptr)},
          {"created", time_to_text(input.created_ms)},
          {"used", time_to_text(input.used_ms)},
          {"known", known},
          {"needed", input.needed}};
}

HttpResponse input_problem(const Status& status) {
  int code = 503;
  if (status.code() == "unknown-input") code = 404;
  if (status.code() == "input-needed") code = 409;
  if (status.code() == "digest-differs") code = 422;
  if (status.code() == "store-full" || status.code() == "disk-full") code = 507;
  return problem_response({code, status.code(), status.message(), status.place(), status.remedy()});
}

}  // namespace

HttpResponse Api::upload(const Call& call) {
  if (closing_) return problem_response(503, "closing", "the service is being shut down");
  const RequestHead& head = call.request.head;
  if (head.field("content-type") != "application/octet-stream") {
    return problem_response(415, "content-type", "an upload is the file as it is",
                            "send Content-Type: application/octet-stream", "Content-Type");
  }
  const auto name = head.parameter("name");
  if (name && (name->empty() || name->size() > 255)) {
    return problem_response(400, "bad-request", "'name' has 1 to 255 characters",
                            "leave it out, or shorten it", "name");
  }
  if (!call.id.empty() && !is_digest(call.id)) {
    return problem_response(400, "bad-request", "this is no SHA-256 in lower case",
                            "name 64 digits and letters a to f", "digest");
  }
  const std::int64_t most = std::min(parts_.options.upload_bytes, parts_.inputs.most_bytes());
  const auto too_long = [most] {
    return problem_response(413, "upload-too-long", fmt::format("an upload has at most {} bytes", most),
                            "compress it, or raise --upload-size");
  };
  if (head.content_length.value_or(0) > static_cast<std::uint64_t>(most)) return too_long();
  auto upload = parts_.inputs.begin(most);
  if (!upload.ok()) return input_problem(upload.status());
  const bool whole = call.request.read_body([&](std::string_view piece) { return (*upload)->take(piece); });
  if ((*upload)->too_long() || (!whole && (*upload)->broken_by_reader())) {
    parts_.inputs.abandon(**upload);
    return (*upload)->too_long() ? too_long() : problem_response(400, "bad-request", "the upload broke off");
  }
  const auto stored =
      parts_.inputs.finish(**upload, name ? std::optional(printable(*name)) : std::nullopt, call.id);
  if (!stored.ok()) return input_problem(stored.status());
  HttpResponse response =
      json_response(stored->known ? 200 : 201, input_to_json(stored->input, stored->known));
  response.fields.emplace_back("Location", "/v1/inputs/" + stored->input.digest);
  return response;
}

HttpResponse Api::list_inputs(const Call& call) {
  HttpResponse refusal;
  const auto limit = whole_parameter(call.request.head, "limit", 50, 1, 500, refusal);
  const auto from = whole_parameter(call.request.head, "cursor", 0, 0, INT64_MAX / 2, refusal);
  if (!limit || !from) return refusal;
  std::vector<InputRecord> inputs;
  std::int64_t total = 0;
  const Status status = parts_.journal.read([&](JobTable& table) {
    inputs = table.list_inputs(static_cast<int>(*limit), *from);
    total = table.count_inputs();
  });
  if (!status.ok()) return problem_response(status);
  Json json = {{"inputs", Json::array()}, {"total", total}, {"next", nullptr}};
  for (const InputRecord& input : inputs) json["inputs"].push_back(input_to_json(input, true));
  const std::int64_t end = *from + static_cast<std::int64_t>(inputs.size());
  if (end < total && !inputs.empty()) json["next"] = std::to_string(end);
  json["bytes"] = parts_.inputs.used_bytes();
  json["bytes_limit"] = parts_.inputs.most_bytes();
  return json_response(200, json);
}

HttpResponse Api::get_input(const Call& call) {
  std::optional<InputRecord> input;
  const Status status = parts_.journal.read([&](JobTable& table) { input = table.find_input(call.id); });
  if (!status.ok()) return problem_response(status);
  if (!input)
    return problem_response(404, "unknown-input", "the store does not have this input", "upload it");
  return json_response(200, input_to_json(*input, true));
}

HttpResponse Api::delete_input(const Call& call) {
  const Status status = parts_.inputs.remove(call.id);
  if (!status.ok()) return input_problem(status);
  HttpResponse response;
  response.status = 204;
  return response;
}

HttpResponse Api::list_analyses(const Call&) {
  Json json = {{"analyses", Json::array()}};
  std::int64_t bytes = 0;
  for (const StoredOrder& analysis : parts_.inputs.analyses()) {
    json["analyses"].push_back(
        {{"digest", analysis.key}, {"bytes", analysis.bytes}, {"used", time_to_text(analysis.used_ms)}});
    bytes += analysis.bytes;
  }
  json["total"] = json["analyses"].size();
  json["bytes"] = bytes;
  return json_response(200, json);
}

HttpResponse Api::list_files(const Call& call) {
  const auto listing = parts_.roots.list(call.request.head.parameter("path").value_or(""), kMostEntries);
  if (!listing.ok()) {
    const Status& status = listing.status();
    const int code = status.code() == "file-not-found" ? 404 : 422;
    return problem_response({code, status.code(), status.message(), status.place(), status.remedy()});
  }
  Json json = {{"path", listing->path},
               {"parent", listing->parent ? Json(*listing->parent) : Json(nullptr)},
               {"entries", Json::array()},
               {"truncated", listing->truncated}};
  for (const FileEntry& entry : listing->entries) {
    json["entries"].push_back(
        {{"name", entry.name},
         {"path", entry.path},
         {"kind", entry.is_folder ? "folder" : "file"},
         {"bytes", entry.bytes ? Json(*entry.bytes) : Json(nullptr)},
         {"modified", entry.modified_ms ? Json(time_to_text(*entry.modified_ms)) : Json(nullptr)}});
  }
  return json_response(200, json);
}

}  // namespace stanchion::service
