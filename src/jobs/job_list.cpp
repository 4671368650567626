#include "jobs/job_list.hpp"

#include <fmt/format.h>

#include <unordered_map>

namespace stanchion {
namespace {

constexpr std::size_t kMostToldOf = 50;

std::string in_words(std::size_t line, const Status& failure) {
  std::string text = fmt::format("line {}: ", line);
  if (!failure.place().empty()) text += failure.place() + ": ";
  text += fmt::format("{} [{}]", failure.message(), failure.code());
  if (!failure.remedy().empty()) text += "; " + failure.remedy();
  return text;
}

}  // namespace

Result<std::vector<ListedJob>> read_job_list(std::string_view text, const std::string& name,
                                             const std::string& folder, const RequestRules& rules) {
  std::vector<ListedJob> jobs;
  std::unordered_map<std::string, std::size_t> line_of;
  std::vector<std::string> bad;
  std::size_t many_bad = 0, number = 0;
  const auto refuse = [&](const Status& failure) {
    if (++many_bad <= kMostToldOf) bad.push_back(in_words(number, failure));
  };
  if (text.substr(0, 3) == "\xEF\xBB\xBF") text.remove_prefix(3);
  while (!text.empty()) {
    ++number;
    const auto end = std::min(text.find('\n'), text.size());
    const std::string_view line = text.substr(0, end);
    text.remove_prefix(std::min(end + 1, text.size()));
    if (line.find_first_not_of(" \t\r") == std::string_view::npos) continue;
    auto request = parse_request(line, rules);
    if (!request.ok()) {
      refuse(request.status());
      continue;
    }
    const auto [known, fresh] = line_of.try_emplace(request->id, number);
    if (!fresh) {
      refuse(Status::bad_input("doubled-id",
                               fmt::format("'{}' is also the id of line {}", request->id, known->second),
                               "id", "give every job an id of its own"));
      continue;
    }
    resolve_inputs(*request, folder);
    jobs.push_back({std::move(*request), number});
  }
  if (many_bad > 0) {
    if (many_bad > bad.size()) bad.push_back(fmt::format("and {} more", many_bad - bad.size()));
    return Status::bad_input(
        "bad-jobs",
        fmt::format("{} cannot be run, so nothing was:\n  {}",
                    many_bad == 1 ? "one line" : fmt::format("{} lines", many_bad), fmt::join(bad, "\n  ")),
        name, "mend these lines; data/schemas/request-1.json describes a request");
  }
  if (jobs.empty())
    return Status::bad_input("empty-file", "there is no job", name, "write one request a line");
  return jobs;
}

}  // namespace stanchion
