#include "jobs/batch_summary.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <iterator>
#include <nlohmann/json.hpp>

#include "model/exit_code.hpp"
#include "model/numbers.hpp"
#include "model/version.hpp"
#include "report/markup.hpp"

namespace stanchion {
namespace {

using Json = nlohmann::ordered_json;

constexpr std::size_t kMostNamed = 40;
constexpr int kFromWorst[] = {kExitInternal,   kExitResource, kExitUsage,
                              kExitUnresolved, kExitNotGood,  kExitGood};

int rank_of(int code) {
  const auto* const found = std::find(std::begin(kFromWorst), std::end(kFromWorst), code);
  return found == std::end(kFromWorst) ? 0 : static_cast<int>(found - kFromWorst);
}

const char* meaning_of(int code) {
  switch (code) {
    case kExitGood:
      return "answered, the good answer";
    case kExitNotGood:
      return "answered, not the good answer";
    case kExitUsage:
      return "bad usage or input";
    case kExitUnresolved:
      return "unresolved";
    case kExitResource:
      return "a limit was met";
    default:
      return "a defect of the program";
  }
}

std::size_t with_code(const BatchSummary& summary, int code) {
  return static_cast<std::size_t>(
      std::count_if(summary.results.begin(), summary.results.end(),
                    [code](const JobResult& job) { return job.exit_code == code; }));
}

std::string reason_of(const JobResult& job) {
  return job.reason.empty() ? meaning_of(job.exit_code) : job.reason;
}

std::string opening(const BatchSummary& summary) {
  const std::size_t jobs = summary.results.size() + summary.not_run.size();
  if (summary.interrupted) {
    return fmt::format("Interrupted: {} of {} jobs have a result. The same command with --resume goes on.",
                       summary.results.size(), jobs);
  }
  if (!summary.not_run.empty()) {
    return fmt::format("{} of {} jobs have a result, {} have none.", summary.results.size(), jobs,
                       summary.not_run.size());
  }
  const std::size_t good = with_code(summary, kExitGood);
  if (good == jobs) return fmt::format("All {} jobs are answered well.", jobs);
  return fmt::format("{} of {} jobs are answered well, {} not.", good, jobs, jobs - good);
}

}  // namespace

int worse_code(int one, int other) {
  return rank_of(one) <= rank_of(other) ? one : other;
}

int exit_code_of(const BatchSummary& summary) {
  if (summary.interrupted) return kExitInterrupted;
  int code = summary.not_run.empty() ? kExitGood : kExitUnresolved;
  for (const JobResult& job : summary.results) code = worse_code(code, job.exit_code);
  return code;
}

std::string batch_text(const BatchSummary& summary) {
  std::string text = opening(summary) + "\n\n";
  for (auto code = std::rbegin(kFromWorst); code != std::rend(kFromWorst); ++code) {
    if (const std::size_t many = with_code(summary, *code); many > 0) {
      text += fmt::format("  {:>7}  {} (exit code {})\n", grouped(static_cast<Offset>(many)),
                          meaning_of(*code), *code);
    }
  }
  if (!summary.not_run.empty()) {
    text += fmt::format("  {:>7}  without a result\n", grouped(static_cast<Offset>(summary.not_run.size())));
  }
  std::vector<const JobResult*> bad;
  for (const JobResult& job : summary.results) {
    if (job.exit_code != kExitGood) bad.push_back(&job);
  }
  std::stable_sort(bad.begin(), bad.end(), [](const JobResult* one, const JobResult* other) {
    return rank_of(one->exit_code) < rank_of(other->exit_code);
  });
  if (!bad.empty()) text += "\n";
  for (std::size_t k = 0; k < std::min(bad.size(), kMostNamed); ++k) {
    text += fmt::format("  {}  {}, exit code {}: {}\n", bad[k]->id, bad[k]->command, bad[k]->exit_code,
                        reason_of(*bad[k]));
  }
  if (bad.size() > kMostNamed) text += fmt::format("  and {} more\n", bad.size() - kMostNamed);
  text += "\n";
  if (!summary.shard.empty()) text += fmt::format("  part          {}\n", summary.shard);
  text += fmt::format("  results       {}\n", summary.results_path);
  if (summary.taken_over > 0) {
    text += fmt::format("  taken over    {} of an earlier run, whose inputs and options are the same\n",
                        grouped(static_cast<Offset>(summary.taken_over)));
  }
  if (summary.damaged + summary.doubled > 0) {
    text += fmt::format("  mended        {} half-written and {} doubled lines of the results were removed\n",
                        summary.damaged, summary.doubled);
  }
  text += fmt::format("  time          {}\n", duration_in_words(summary.seconds));
  text +=
      "\nNot checked: each result says what it does not cover; the verdict defers to licensed practice and "
      "to "
      "the\ncodes in force where the structure stands.\n";
  return text;
}

std::string batch_json(const BatchSummary& summary) {
  Json json;
  json["schema_version"] = 1;
  json["program"] = {{"name", program_name()}, {"version", program_version()}};
  json["command"] = "batch";
  json["arguments"] = summary.arguments;
  json["jobs_path"] = summary.jobs_path;
  json["results_path"] = summary.results_path;
  json["shard"] = summary.shard.empty() ? Json(nullptr) : Json(summary.shard);
  json["interrupted"] = summary.interrupted;
  json["exit_code"] = exit_code_of(summary);
  json["jobs"] = summary.results.size() + summary.not_run.size();
  auto& codes = json["by_exit_code"] = Json::object();
  for (const int code : {0, 1, 2, 3, 4, 5}) codes[std::to_string(code)] = with_code(summary, code);
  json["taken_over"] = summary.taken_over;
  json["damaged_lines_removed"] = summary.damaged;
  json["doubled_lines_removed"] = summary.doubled;
  json["seconds"] = summary.seconds;
  auto& results = json["results"] = Json::array();
  for (const JobResult& job : summary.results) {
    results.push_back({{"id", job.id},
                       {"command", job.command},
                       {"exit_code", job.exit_code},
                       {"reason", job.reason.empty() ? Json(nullptr) : Json(job.reason)},
                       {"seconds", job.seconds},
                       {"cpu_seconds", job.cpu_seconds},
                       {"peak_bytes", job.peak_bytes},
                       {"attempts", job.attempts}});
  }
  json["not_run"] = summary.not_run;
  json["not_checked"] = {
      "each result says what it does not cover",
      "adequacy: the verdict defers to licensed practice and to the codes in force where the "
      "structure stands"};
  return json.dump(2, ' ', false, Json::error_handler_t::replace) + "\n";
}

std::string batch_junit(const BatchSummary& summary) {
  const std::size_t failures = with_code(summary, kExitNotGood);
  const std::size_t errors = summary.results.size() - failures - with_code(summary, kExitGood);
  std::string xml = fmt::format(
      "<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n<testsuites>\n<testsuite name=\"{}\" tests=\"{}\" "
      "failures=\"{}\" errors=\"{}\" skipped=\"{}\" time=\"{:.3f}\">\n",
      escaped(summary.jobs_path), summary.results.size() + summary.not_run.size(), failures, errors,
      summary.not_run.size(), summary.seconds);
  for (const JobResult& job : summary.results) {
    xml += fmt::format("<testcase classname=\"stanchion.{}\" name=\"{}\" time=\"{:.3f}\">",
                       escaped(job.command), escaped(job.id), job.seconds);
    if (job.exit_code != kExitGood) {
      xml += fmt::format("<{0} message=\"{1}\" type=\"exit-code-{2}\">{1}</{0}>",
                         job.exit_code == kExitNotGood ? "failure" : "error", escaped(reason_of(job)),
                         job.exit_code);
    }
    xml += "</testcase>\n";
  }
  for (const std::string& id : summary.not_run) {
    xml += fmt::format("<testcase classname=\"stanchion\" name=\"{}\" time=\"0\"><skipped/></testcase>\n",
                       escaped(id));
  }
  return xml + "</testsuite>\n</testsuites>\n";
}

}  // namespace stanchion
