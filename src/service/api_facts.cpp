// What the service says about itself.
#include <dirent.h>
#include <fmt/format.h>
#include <unistd.h>

#include <fstream>
#include <memory>

#include "model/version.hpp"
#include "service/api.hpp"
#include "service/problem.hpp"

namespace stanchion::service {
namespace {

using Json = nlohmann::ordered_json;

const char* kind_of(const OptionEntry& option) {
  const bool several = option.kind == OptionKind::kTexts || option.kind == OptionKind::kPositionals;
  if (option.use == OptionUse::kInput) return several ? "files" : "file";
  switch (option.kind) {
    case OptionKind::kFlag:
      return "flag";
    case OptionKind::kReal:
      return "real";
    case OptionKind::kWhole:
      return "whole";
    case OptionKind::kNumbers:
      return "numbers";
    case OptionKind::kTexts:
      return "texts";
    default:
      return "text";
  }
}

Json option_to_json(const OptionEntry& option) {
  return {{"key", option.key},
          {"option", option.name},
          {"kind", kind_of(option)},
          {"value", option.value},
          {"help", option.help},
          {"group", option.group},
          {"required", option.required || option.key == "stiffness"},
          {"choices", choices_of(option)}};
}

double open_files() {
  const std::unique_ptr<DIR, int (*)(DIR*)> folder(::opendir("/proc/self/fd"), &::closedir);
  double count = -3;  // itself, and the two dots
  while (folder && ::readdir(folder.get()) != nullptr) ++count;
  return count;
}

double resident_bytes() {
  double pages = 0, resident = 0;
  std::ifstream("/proc/self/statm") >> pages >> resident;
  return resident * static_cast<double>(::sysconf(_SC_PAGESIZE));
}

}  // namespace

HttpResponse Api::list_commands(const Call&) {
  Json json = {{"commands", Json::array()}};
  for (const CommandTable& table : parts_.options.rules.commands) {
    if (!table.requestable) continue;
    Json command = {{"name", table.name},
                    {"summary", table.summary},
                    {"inputs", Json::array()},
                    {"options", Json::array()}};
    for (const OptionEntry& option : table.options) {
      if (option.use == OptionUse::kInput && option.key != "list")
        command["inputs"].push_back(option_to_json(option));
      if (option.use == OptionUse::kSetting) command["options"].push_back(option_to_json(option));
    }
    json["commands"].push_back(command);
  }
  return json_response(200, json);
}

HttpResponse Api::service_facts(const Call& call) {
  const ServiceOptions& options = parts_.options;
  Json json = {{"program", program_name()},
               {"version", program_version()},
               {"api", "v1"},
               {"roots", Json::array()},
               {"limits", Json::object()},
               {"tokens_needed", parts_.tokens.has_value()},
               {"scopes", Json::array()}};
  for (const Scope scope : {Scope::kRead, Scope::kSubmit, Scope::kAdmin}) {
    if (scope <= call.scope) json["scopes"].push_back(service::name_of(scope));
  }
  const bool known = call.scope != Scope::kNone;
  if (known) json["roots"] = parts_.roots.names();
  const auto limit = [&](const char* key, std::int64_t value) { json["limits"][key] = known ? value : 0; };
  limit("request_bytes", options.request_bytes);
  limit("upload_bytes", std::min(options.upload_bytes, options.store_bytes));
  limit("store_bytes", options.store_bytes);
  limit("memory_bytes", options.share.memory_bytes);
  limit("processors", options.share.processors);
  limit("connections", options.http.connections);
  limit("requests_per_second", static_cast<std::int64_t>(options.requests_per_second));
  limit("queued_jobs", options.queued_jobs);
  return json_response(200, json);
}

HttpResponse Api::metrics(const Call&) {
  MetricsText text;
  const RunnerFigures runner = parts_.runner.figures();
  const FinisherFigures finisher = parts_.finisher.figures();
  const JobJournal::Figures journal = parts_.journal.figures();
  const HttpFigures http = parts_.http_figures();
  std::vector<MetricsText::Sample> states;
  std::int64_t input_count = 0;
  const Status status = parts_.journal.read([&](JobTable& table) {
    for (const auto& [state, count] : table.count_by_state()) {
      states.push_back({{{"state", state}}, static_cast<double>(count)});
    }
    input_count = table.count_inputs();
  });
  if (!status.ok()) return problem_response(status);
  text.gauges("stanchion_build_info", "Version of the program.", {{{{"version", program_version()}}, 1}});
  text.gauges("stanchion_jobs", "Jobs in the store by state.", states);
  text.counters("stanchion_jobs_ended_total", "Jobs ended since the start.",
                {{{{"state", "done"}}, static_cast<double>(finisher.done)},
                 {{{"state", "failed"}}, static_cast<double>(finisher.failed)},
                 {{{"state", "cancelled"}}, static_cast<double>(finisher.cancelled)}});
  text.counter("stanchion_jobs_started_total", "Child processes started for jobs.",
               static_cast<double>(runner.started));
  text.counter("stanchion_forecasts_total", "Child processes started for forecasts.",
               static_cast<double>(runner.forecasts));
  text.counter("stanchion_jobs_cpu_seconds_total", "Processor time of ended jobs.", finisher.cpu_seconds);
  text.gauge("stanchion_jobs_memory_bytes", "Memory set aside for running jobs.",
             static_cast<double>(runner.memory_bytes));
  text.gauge("stanchion_jobs_memory_limit_bytes", "Memory that all jobs together may use.",
             static_cast<double>(parts_.options.share.memory_bytes));
  text.counter("stanchion_store_transactions_total", "Transactions written to disk.",
               static_cast<double>(journal.transactions));
  text.counter("stanchion_store_changes_total", "Changes in these transactions.",
               static_cast<double>(journal.changes));
  text.gauge("stanchion_store_bytes", "Inputs and analyses in the store.",
             static_cast<double>(parts_.inputs.used_bytes()));
  text.gauge("stanchion_store_limit_bytes", "What they may take.",
             static_cast<double>(parts_.inputs.most_bytes()));
  text.gauge("stanchion_store_inputs", "Inputs in the store.", static_cast<double>(input_count));
  text.counter("stanchion_store_evicted_total", "Inputs and analyses dropped to make room.",
               static_cast<double>(parts_.inputs.evicted()));
  text.counter("stanchion_connections_total", "Connections taken.", static_cast<double>(http.accepted));
  text.counter("stanchion_connections_refused_total", "Connections turned away at the limit.",
               static_cast<double>(http.turned_away));
  text.gauge("stanchion_connections", "Connections that are open.", static_cast<double>(http.open));
  text.gauge("process_resident_memory_bytes", "Memory of the service itself.", resident_bytes());
  text.gauge("process_open_fds", "Open files of the service itself.", open_files());
  text.append(figures_.text());
  HttpResponse response;
  response.content_type = "text/plain; version=0.0.4; charset=utf-8";
  response.body = text.text();
  return response;
}

}  // namespace stanchion::service
