#include "cli/question_targets.hpp"

#include <algorithm>
#include <filesystem>
#include <fstream>
#include <system_error>

#include "cli/output_targets.hpp"

namespace stanchion::cli {
namespace {

Status refuse_dash(const char* option, const std::optional<std::string>& path) {
  if (path != "-") return {};
  return Status::bad_usage("bad-argument", "this is written to a file, not to standard output", option,
                           "name a file");
}

struct Place {
  const char* option;
  const std::optional<std::string>& path;
  std::optional<AnswerFile>& file;
};

std::vector<Place> places(const OutputOptions& output, Targets& targets) {
  return {{"--json", output.json, targets.json},
          {"--html", output.html, targets.html},
          {"--junit", output.junit, targets.junit},
          {"--csv", output.csv, targets.csv},
          {"--vtu", output.vtu, targets.vtu},
          {"--view", output.view, targets.view},
          {"--certificate", output.certificate, targets.certificate},
          {"--witness", output.witness, targets.witness},
          {"--svg", output.svg, targets.svg},
          {"--modes", output.modes, targets.modes}};
}

/// No place is standard output (but that of JSON), and none is named twice.
Status check_places(const OutputOptions& output, Targets& targets) {
  std::vector<NamedTarget> named{{"--results", output.results}, {"--log", output.log}};
  if (Status status = refuse_dash("--results", output.results); !status.ok()) return status;
  for (const Place& place : places(output, targets)) {
    if (&place.path != &output.json) {
      if (Status status = refuse_dash(place.option, place.path); !status.ok()) return status;
    }
    named.insert(named.end() - 2, {place.option, place.path});
  }
  return check_targets_differ(named);
}

/// How often `words` name the file at `path`: alone, after "--option=", or before ":factor".
int times_named(const std::string& path, const std::vector<std::string>& words) {
  return static_cast<int>(std::count_if(words.begin(), words.end(), [&](const std::string& word) {
    const auto value = word.find('=') + 1;  // 0 where there is none
    const auto colon = std::min(word.rfind(':'), word.size());
    for (const std::string& name : {word, word.substr(value), word.substr(0, colon)}) {
      std::error_code absent;
      if (std::filesystem::equivalent(name, path, absent)) return true;
    }
    return false;
  }));
}

/// Pages and JUnit documents begin with a mark, JSON documents of ours with a line of their own; matrices,
/// tables and lists of jobs do not.
bool may_be_an_answer(const std::string& path) {
  std::error_code absent;
  if (!std::filesystem::is_regular_file(path, absent)) return true;
  std::ifstream older(path, std::ios::binary);
  char first[2] = {'{', '\n'};  // for a file that is empty
  older.read(first, 2);
  return first[0] == '<' || (first[0] == '{' && first[1] == '\n');
}

void remove_older(const OutputOptions& output, Targets& targets) {
  for (const Place& place : places(output, targets)) {
    if (place.file) place.file->remove_older();
  }
}

}  // namespace

Status open_targets(const OutputOptions& output, const Request& request, Targets& targets) {
  std::vector<std::string> read = files_read(request.input);
  read.insert(read.end(), request.steps.begin(), request.steps.end());
  if (!request.audit.values.empty()) read.push_back(request.audit.values);
  if (Status status = check_places(output, targets); !status.ok()) return status;
  for (const Place& place : places(output, targets)) {
    auto opened = open_target(place.option, place.path, read);
    if (!opened.ok()) return opened.status();
    place.file = std::move(*opened);
  }
  if (Status status = check_not_read("--results", output.results, read); !status.ok()) return status;
  remove_older(output, targets);
  targets.opened = true;
  if (!output.certificate) return {};
  auto support = certify_support_files(request);
  if (support.ok()) targets.support_files = std::move(*support);
  return support.status();
}

void open_for_refusal(const OutputOptions& output, const std::vector<std::string>& words,
                      const std::vector<std::string>& read, Targets& targets) {
  targets = {};
  if (!check_places(output, targets).ok()) return;
  for (const Place& place : places(output, targets)) {
    if (!place.path || times_named(*place.path, words) > 1) continue;
    const bool document =
        &place.path == &output.json || &place.path == &output.html || &place.path == &output.junit;
    if (document && !may_be_an_answer(*place.path)) continue;
    auto opened = open_target(place.option, place.path, read);
    if (opened.ok()) place.file = std::move(*opened);
  }
  remove_older(output, targets);
}

void deliver_refusal(Targets& targets, const Refusal& refusal) {
  Status ignored;
  if (targets.html && !targets.html->committed()) ignored = targets.html->commit(refusal_to_html(refusal));
  if (targets.junit && !targets.junit->committed())
    ignored = targets.junit->commit(refusal_to_junit(refusal));
}

}  // namespace stanchion::cli
