// Many requests from one file: options, results to go on from, the run, the summary.
#include <fmt/format.h>

#include <cstdio>
#include <filesystem>
#include <set>
#include <unordered_map>

#include "base/threads.hpp"
#include "cli/answer_file.hpp"
#include "cli/command.hpp"
#include "cli/interrupt.hpp"
#include "cli/log_file.hpp"
#include "cli/output_targets.hpp"
#include "cli/progress_line.hpp"
#include "cli/question_targets.hpp"
#include "cli/terminal.hpp"
#include "engine/host.hpp"
#include "jobs/batch.hpp"
#include "jobs/batch_summary.hpp"
#include "jobs/durable_file.hpp"
#include "model/byte_size.hpp"
#include "model/exit_code.hpp"

namespace stanchion::cli {
namespace {

constexpr std::int64_t kUsualCpuLimit = 7 * 86'400;  // nothing runs for ever

/// Part `number` of `parts`, from 1.
struct Shard {
  std::size_t number = 1, parts = 1;
};

class BatchCommand : public Command {
 public:
  const char* name() const override { return "batch"; }
  const char* summary() const override { return "many requests from one file, resumable"; }
  void declare(Arguments& arguments) override;
  void refuse(const Status& why, const Call& call) override;
  Result<int> run(const Call& call) override;

 private:
  Result<int> answer(const Call& call);
  Result<Shard> shard() const;
  Result<BatchOptions> batch_options() const;
  std::string results_path(const Shard& shard) const;
  Result<std::vector<ListedJob>> read_jobs(const Call& call) const;
  Status go_on(ResultFile& file, const std::vector<const ListedJob*>& jobs, FileDigests& files,
               BatchSummary& summary) const;
  Result<int> run_jobs(const std::vector<const ListedJob*>& jobs, const Call& call, const Shard& part,
                       BatchSummary& summary);
  Result<int> merge(const std::vector<const ListedJob*>& jobs, BatchSummary& summary);
  Result<int> deliver(BatchSummary& summary);
  OutputOptions places() const;
  void note_files_read(const std::vector<ListedJob>& jobs);
  Status open_summaries(const std::string& results);

  std::optional<std::string> jobs_, results_, shard_, memory_cap_, store_, store_size_, reports_,
      certificates_, logs_, json_, junit_, log_, log_format_;
  std::vector<std::string> merge_;
  std::optional<std::int64_t> threads_, cpu_limit_;
  bool resume_ = false, retry_ = false, quiet_ = false;
  std::vector<std::string> read_;  ///< no answer may take the place of these
  Targets targets_;
};

void BatchCommand::declare(Arguments& arguments) {
  arguments.positional("JOBS", jobs_, "FILE", "one request a line, as JSON; - for standard input", true);
  arguments.group("Results", true);
  arguments.text("--results", results_, "FILE",
                 "one result a line, as they come (default: JOBS with .results.jsonl)");
  arguments.flag("--resume", resume_, "keep the results of jobs whose inputs and options are the same");
  arguments.flag("--retry-failed", retry_, "with --resume: run again what met a limit or a defect");
  arguments.texts("--merge", merge_, "FILE",
                  "run nothing: join the results of these parts (may be repeated)");
  arguments.last().use = OptionUse::kInput;
  arguments.text("--json", json_, "FILE", "the summary as JSON; - for standard output, nothing else");
  arguments.text("--junit", junit_, "FILE", "the summary as JUnit XML, a test case a job");
  arguments.text("--reports", reports_, "DIR", "a page for every job, ID.html");
  arguments.text("--certificates", certificates_, "DIR", "a certificate for every check and count, ID.json");
  arguments.text("--logs", logs_, "DIR", "what each job's process wrote, ID.log");
  arguments.flag("--quiet", quiet_, "no text on standard output, no progress line");
  arguments.text("--log", log_, "FILE", "what happens to each job; - for standard error");
  arguments.text("--log-format", log_format_, "text|json",
                 "json: each line an object, with the job's id (text)");
  arguments.last().use = OptionUse::kRunner;
  arguments.group("Resources");
  arguments.text("--shard", shard_, "i/n", "only every n-th job, beginning with the i-th: for job arrays");
  arguments.text("--memory-cap", memory_cap_, "SIZE",
                 "of all jobs together (default: four fifths of the memory); decides how many run at a time");
  arguments.whole("--threads", threads_, "N", "of all jobs together (default: every processor available)");
  arguments.whole("--cpu-limit", cpu_limit_, "SECONDS",
                  "processor time that one job may take (604800, a week)");
  arguments.text("--analysis-store", store_, "DIR",
                 "keep elimination orders here for later runs (default: for this run only)");
  arguments.text("--store-size", store_size_, "SIZE",
                 "of the analysis store (20G); orders used least recently go first");
  arguments.closing(
      "A line is {\"id\": \"a1\", \"command\": \"count\", \"inputs\": {\"stiffness\": \"K.mtx\", "
      "\"geometric\": "
      "\"G.mtx\"},\n\"options\": {\"at\": [1.5, 2]}}; paths count from the folder of JOBS. `stanchion "
      "describe\n"
      "request-schema` describes it. Bad lines are refused before anything runs. Each job runs in a process\n"
      "of its own and gets exactly one result; one that fails stops nothing. The exit code is the worst of\n"
      "the jobs: 5, 4, 2, 3, 1, 0 in this order.\n\n"
      "Examples:\n"
      "  stanchion batch jobs.jsonl --memory-cap 8G --junit summary.xml\n"
      "  stanchion batch jobs.jsonl --resume\n"
      "  stanchion batch jobs.jsonl --shard 2/16 --results part2.jsonl\n"
      "  stanchion batch jobs.jsonl --merge part1.jsonl --merge part2.jsonl --results all.jsonl");
}

Result<Shard> BatchCommand::shard() const {
  Shard part;
  if (!shard_) return part;
  unsigned number = 0, parts = 0;
  int used = 0;
  const bool read = std::sscanf(shard_->c_str(), "%7u/%7u%n", &number, &parts, &used) == 2 &&
                    static_cast<std::size_t>(used) == shard_->size();
  if (!read || number < 1 || parts < 1 || number > parts) {
    return Status::bad_usage("bad-shard", fmt::format("'{}' is no part of a whole", *shard_), "--shard",
                             "write i/n with i from 1 to n, e.g. --shard 2/16");
  }
  part.number = number;
  part.parts = parts;
  return part;
}

std::string BatchCommand::results_path(const Shard& part) const {
  if (results_) return *results_;
  if (*jobs_ == "-") return "batch.results.jsonl";
  std::filesystem::path path(*jobs_);
  const std::string stem = path.extension() == ".jsonl" ? path.stem().string() : path.filename().string();
  const std::string which = part.parts == 1 ? "" : fmt::format(".{}-of-{}", part.number, part.parts);
  return (path.parent_path() / (stem + which + ".results.jsonl")).string();
}

/// `target` becomes the size that was asked, if one was.
Status take_size(const std::optional<std::string>& asked, const char* option, Offset& target) {
  if (!asked) return {};
  const auto bytes = parse_byte_size(*asked);
  if (!bytes.ok()) {
    return Status::bad_usage(bytes.status().code(), bytes.status().message(), option,
                             bytes.status().remedy());
  }
  target = *bytes;
  return {};
}

Result<BatchOptions> BatchCommand::batch_options() const {
  BatchOptions options;
  options.memory_cap = total_memory_bytes() / 10 * 8;
  if (Status status = take_size(memory_cap_, "--memory-cap", options.memory_cap); !status.ok()) return status;
  if (Status status = take_size(store_size_, "--store-size", options.store_bytes); !status.ok())
    return status;
  options.processors = available_processors();
  if (threads_) {
    if (*threads_ < 1 || *threads_ > 65536) {
      return Status::bad_usage("out-of-range", fmt::format("{} is out of range", *threads_), "--threads",
                               "give a whole number from 1");
    }
    options.processors = static_cast<int>(*threads_);
  }
  if (cpu_limit_ && (*cpu_limit_ < 1 || *cpu_limit_ > 1'000'000'000)) {
    return Status::bad_usage("out-of-range", fmt::format("{} is out of range", *cpu_limit_), "--cpu-limit",
                             "give a whole number of seconds from 1");
  }
  options.cpu_seconds = cpu_limit_.value_or(kUsualCpuLimit);
  options.analysis_store = store_.value_or("");
  options.reports = reports_.value_or("");
  options.certificates = certificates_.value_or("");
  options.logs = logs_.value_or("");
  return options;
}

Result<std::vector<ListedJob>> BatchCommand::read_jobs(const Call& call) const {
  std::string text, folder;
  if (*jobs_ == "-") {
    char block[65536];
    for (std::size_t count; (count = std::fread(block, 1, sizeof block, stdin)) > 0;)
      text.append(block, count);
  } else {
    auto bytes = read_whole(*jobs_);
    if (!bytes) {
      return Status::bad_input("file-not-found", "the file of jobs cannot be read", *jobs_,
                               "name a file with one request a line");
    }
    text = std::move(*bytes);
    folder = std::filesystem::path(*jobs_).parent_path().string();
  }
  return read_job_list(text, *jobs_, folder, call.rules());
}

OutputOptions BatchCommand::places() const {
  OutputOptions output;
  output.json = json_;
  output.junit = junit_;
  output.results = results_;
  output.log = log_;
  return output;
}

/// The list of jobs, the parts to merge, and every file that a job names.
void BatchCommand::note_files_read(const std::vector<ListedJob>& jobs) {
  std::set<std::string> read(merge_.begin(), merge_.end());
  if (jobs_) read.insert(*jobs_);
  for (const ListedJob& job : jobs) {
    for (const JobInput& input : job.request.inputs) read.insert(input.path);
  }
  read_.assign(read.begin(), read.end());
}

/// Opens the summaries and removes older ones; `results` is where the results go, asked or not.
Status BatchCommand::open_summaries(const std::string& results) {
  if (Status status = check_targets_differ(
          {{"--results", results}, {"--json", json_}, {"--junit", junit_}, {"--log", log_}});
      !status.ok()) {
    return status;
  }
  for (const auto& [option, target, file] :
       {std::tuple{"--json", &json_, &targets_.json}, std::tuple{"--junit", &junit_, &targets_.junit}}) {
    auto opened = open_target(option, *target, read_);
    if (!opened.ok()) return opened.status();
    *file = std::move(*opened);
  }
  if (Status status = check_not_read("--results", results_, read_); !status.ok()) return status;
  for (const auto* file : {&targets_.json, &targets_.junit}) {
    if (*file) (*file)->remove_older();
  }
  targets_.opened = true;
  return {};
}

/// Mends what an earlier run left and keeps what still holds.
Status BatchCommand::go_on(ResultFile& file, const std::vector<const ListedJob*>& jobs, FileDigests& files,
                           BatchSummary& summary) const {
  std::unordered_map<std::string, const ListedJob*> job_of;
  for (const ListedJob* job : jobs) job_of[job->request.id] = job;
  auto found = file.recover([&](const JobResult& result) {
    const auto job = job_of.find(result.id);
    if (job == job_of.end()) return true;  // of another list: not ours to drop
    if (!result.digest || result.exit_code == kExitInterrupted) return false;
    if (retry_ && (result.exit_code == kExitResource || result.exit_code == kExitInternal)) return false;
    const auto digest = digest_of(job->second->request, files);
    return digest.ok() && *digest == *result.digest;
  });
  if (!found.ok()) return found.status();
  summary.damaged = found->damaged;
  summary.doubled = found->doubled;
  for (JobResult& result : found->results) {
    if (job_of.count(result.id) != 0) summary.results.push_back(std::move(result));
  }
  summary.taken_over = summary.results.size();
  return {};
}

Result<int> BatchCommand::deliver(BatchSummary& summary) {
  targets_.answered = true;
  if (targets_.junit) {
    if (Status status = targets_.junit->commit(batch_junit(summary)); !status.ok()) return status;
  }
  if (targets_.json) {
    if (Status status = targets_.json->commit(batch_json(summary)); !status.ok()) return status;
  }
  Status printed;
  if (json_ == "-") {
    printed = print_result(batch_json(summary));
  } else if (!quiet_) {
    printed = print_result(batch_text(summary));
  }
  return printed.ok() ? Result<int>(exit_code_of(summary)) : Result<int>(printed);
}

/// Results in the order of the jobs; who has none goes to `not_run`.
void put_in_order(const std::vector<const ListedJob*>& jobs, BatchSummary& summary) {
  std::unordered_map<std::string, JobResult> result_of;
  for (JobResult& result : summary.results) result_of.try_emplace(result.id, std::move(result));
  summary.results.clear();
  for (const ListedJob* job : jobs) {
    const auto found = result_of.find(job->request.id);
    if (found == result_of.end()) {
      summary.not_run.push_back(job->request.id);
    } else {
      summary.results.push_back(std::move(found->second));
    }
  }
}

Result<int> BatchCommand::run_jobs(const std::vector<const ListedJob*>& jobs, const Call& call,
                                   const Shard& part, BatchSummary& summary) {
  CancellationToken token;
  const InterruptGuard guard(token);
  auto options = batch_options();
  if (!options.ok()) return options.status();
  const std::string path = results_path(part);
  summary.results_path = path;
  auto file = ResultFile::open(path);
  if (!file.ok()) return file.status();
  if (!resume_ && !file->empty()) {
    return Status::bad_usage("results-exist", "there are results already", path,
                             "go on from them with --resume, or name another file with --results");
  }
  if (Status status = open_summaries(path); !status.ok()) return status;
  LogOptions logging;
  logging.path = log_;
  const auto json = wants_json_log(log_format_);
  if (!json.ok()) return json.status();
  logging.json = *json;
  const auto log = LogFile::open(logging);
  if (!log.ok()) return log.status();

  const Stopwatch watch;
  FileDigests files;
  if (Status status = go_on(*file, jobs, files, summary); !status.ok()) return status;
  std::vector<const ListedJob*> left;
  {
    std::unordered_map<std::string, bool> done;
    for (const JobResult& result : summary.results) done[result.id] = true;
    for (const ListedJob* job : jobs) {
      if (done.count(job->request.id) == 0) left.push_back(job);
    }
  }
  ProgressLine line(standard_error_is_terminal() && !quiet_ && !log->to_standard_error());
  options->work_folder = path + ".work";
  BatchContext context;
  context.cancel = &token;
  context.progress = [&line](const BatchProgress& progress) { line.update("jobs", progress.fraction); };
  context.log = [&log](const std::string& id, const std::string& text) { log->record({"job", text, id}); };
  std::vector<JobResult> recorded;
  const Status status = run_batch(left, call.rules(), *options, context, files, *file, recorded);
  line.erase();
  for (JobResult& result : recorded) summary.results.push_back(std::move(result));
  if (!status.ok() && status.kind() != StatusKind::kInterrupted) return status;
  summary.interrupted = status.kind() == StatusKind::kInterrupted;
  summary.seconds = watch.seconds();
  put_in_order(jobs, summary);
  return deliver(summary);
}

Result<int> BatchCommand::merge(const std::vector<const ListedJob*>& jobs, BatchSummary& summary) {
  if (resume_ || shard_) {
    return Status::bad_usage("contradiction", "a merge runs nothing", resume_ ? "--resume" : "--shard",
                             "leave it out, or leave --merge out");
  }
  const std::string path = results_path({});
  summary.results_path = path;
  if (Status status = open_summaries(path); !status.ok()) return status;
  if (Status status = check_not_read("--results", path, merge_); !status.ok()) return status;
  std::unordered_map<std::string, std::pair<JobResult, std::string>> result_of;
  for (const std::string& part : merge_) {
    Status read = read_results(part, [&](const JobResult& result, std::string_view line) -> Status {
      const auto [known, fresh] = result_of.try_emplace(result.id, result, std::string(line));
      if (fresh || known->second.first.digest == result.digest) return {};
      return Status::bad_input("conflicting-results",
                               fmt::format("'{}' has two results of different inputs or options", result.id),
                               part, "run the part that is out of date again with --resume");
    });
    if (!read.ok()) return read;
  }
  auto file = AnswerFile::open(path);
  if (!file.ok()) return file.status();
  std::string text;
  for (const ListedJob* job : jobs) {
    const auto found = result_of.find(job->request.id);
    if (found == result_of.end()) continue;
    text += found->second.second + "\n";
    summary.results.push_back(found->second.first);
  }
  if (Status status = file->commit(text); !status.ok()) return status;
  put_in_order(jobs, summary);
  return deliver(summary);
}

/// What is named as a summary must not show an older run once this one is refused.
void BatchCommand::refuse(const Status& why, const Call& call) {
  if (!targets_.opened) {
    if (read_.empty()) note_files_read({});
    OutputOptions output = places();
    if (jobs_ && !results_) output.results = results_path(shard().ok() ? *shard() : Shard{});
    open_for_refusal(output, call.arguments, read_, targets_);
  }
  std::vector<TableRecord> inputs;
  if (jobs_) inputs.push_back({"jobs", *jobs_, ""});
  deliver_refusal(targets_,
                  {name(), call.arguments, {}, {}, inputs, why, exit_code(why.kind()), targets_.answered});
}

Result<int> BatchCommand::run(const Call& call) {
  auto code = answer(call);
  if (!code.ok()) refuse(code.status(), call);
  return code;
}

Result<int> BatchCommand::answer(const Call& call) {
  const auto part = shard();
  if (!part.ok()) return part.status();
  if (retry_ && !resume_) {
    return Status::bad_usage("contradiction", "there is nothing to try again", "--retry-failed",
                             "add --resume");
  }
  const auto listed = read_jobs(call);
  if (!listed.ok()) return listed.status();
  note_files_read(*listed);
  std::vector<const ListedJob*> jobs;
  for (std::size_t k = part->number - 1; k < listed->size(); k += part->parts) jobs.push_back(&(*listed)[k]);
  BatchSummary summary;
  summary.arguments = call.arguments;
  summary.jobs_path = *jobs_;
  summary.shard = shard_.value_or("");
  return merge_.empty() ? run_jobs(jobs, call, *part, summary) : merge(jobs, summary);
}

}  // namespace

std::unique_ptr<Command> make_batch_command() {
  return std::make_unique<BatchCommand>();
}

}  // namespace stanchion::cli
