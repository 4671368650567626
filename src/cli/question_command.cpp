#include "cli/question_command.hpp"

#include <fmt/format.h>

#include <filesystem>
#include <system_error>

#include "cli/answer_file.hpp"
#include "cli/interrupt.hpp"
#include "cli/log_file.hpp"
#include "cli/progress_line.hpp"
#include "cli/terminal.hpp"
#include "model/exit_code.hpp"
#include "model/names.hpp"
#include "model/version.hpp"

#include "report/json.hpp"
#include "report/text.hpp"

namespace stanchion::cli {
namespace {

void declare_output_options(Arguments& arguments, OutputOptions& options) {
  arguments.group("Output");
  arguments.text("--expect", options.expectation, "WHAT",
                 "positive-definite, zero:N or negative:N; exit 1 if not");
  arguments.text("--json", options.json, "FILE",
                 "the whole answer as JSON; - for standard output, nothing else");
  arguments.flag("--quiet", options.quiet, "no text on standard output, no progress line");
  arguments.text("--log", options.log, "FILE", "one line a stage; - for standard error");
  arguments.text("--title", options.title, "TEXT", "printed above the answer");
  arguments.text("--reference", options.reference, "TEXT", "your own reference, printed above the answer");
}

Result<Judgement> build_judgement(const OutputOptions& output, bool symmetric_part, Question question) {
  Judgement judgement{symmetric_part, {}};
  if (!output.expectation) return judgement;
  const auto expectation = parse_expectation(*output.expectation);
  if (!expectation.ok()) return expectation.status();
  if (Status status = check_applicable(*expectation, question); !status.ok()) return status;
  judgement.expectation = *expectation;
  return judgement;
}

/// Bad usage when writing the answer would destroy a file that is read.
Status check_overwrites_nothing(const std::string& target, const InputRequest& input) {
  std::vector<std::string> read{input.stiffness};
  for (const auto& path :
       {input.geometric, input.mass, input.dofs, input.nodes, input.axes, input.fix, input.multipliers}) {
    if (path) read.push_back(*path);
  }
  for (const AddedMatrix& added : input.added) read.push_back(added.path);
  for (const std::string& path : read) {
    std::error_code absent;
    if (!std::filesystem::equivalent(path, target, absent)) continue;
    return Status::bad_usage("contradiction", path + " is read and would be overwritten", "--json",
                             "name another file for the answer");
  }
  return {};
}

/// The JSON file, opened ahead of the work; nothing when no file was asked.
Result<std::optional<AnswerFile>> open_json_file(const OutputOptions& output, const InputRequest& input) {
  std::optional<AnswerFile> file;
  if (!output.json || *output.json == "-") return file;
  if (Status status = check_overwrites_nothing(*output.json, input); !status.ok()) return status;

  auto opened = AnswerFile::open(*output.json);
  if (!opened.ok()) return opened.status();
  file = std::move(*opened);
  return file;
}

Status deliver(const Outcome& outcome, const OutputOptions& output, std::optional<AnswerFile>& json_file) {
  if (json_file) {
    if (Status status = json_file->commit(to_json(outcome)); !status.ok()) return status;
  }
  if (output.json == "-") return print_result(to_json(outcome));
  if (output.quiet) return {};
  return print_result(to_text(outcome));
}

}  // namespace

const char* QuestionCommand::name() const {
  return name_of(question_);
}

void QuestionCommand::declare(Arguments& arguments) {
  declare_request_options(arguments, request_, question_);
  declare_output_options(arguments, output_);
}

Result<Outcome> QuestionCommand::ask(const Request& request, const LogFile& log) const {
  CancellationToken token;
  const InterruptGuard guard(token);
  // A log on the same terminal would be torn apart by the line.
  ProgressLine line(standard_error_is_terminal() && !output_.quiet && !log.to_standard_error());
  RunContext context;
  context.cancel = &token;
  context.progress = [&line](const char* stage, double fraction) { line.update(stage, fraction); };
  context.log = [&log](const std::string& text) { log.line(text); };
  return engine_(request, context);
}

Result<int> QuestionCommand::run(const Call& call) {
  const auto request = build_request(request_, question_);
  if (!request.ok()) return request.status();
  const auto judgement = build_judgement(output_, request_.symmetric_part, question_);
  if (!judgement.ok()) return judgement.status();
  auto json_file = open_json_file(output_, request->input);
  if (!json_file.ok()) return json_file.status();
  const auto log = LogFile::open(output_.log);
  if (!log.ok()) return log.status();

  log->line(fmt::format("{} {}: {}", program_name(), program_version(), fmt::join(call.arguments, " ")));
  auto outcome = ask(*request, *log);

  if (!outcome.ok()) {
    log->line(outcome.status().to_string());
    return outcome.status();
  }
  outcome->command = name();
  outcome->arguments = call.arguments;
  outcome->title = output_.title;
  outcome->reference = output_.reference;
  if (Status status = deliver(*outcome, output_, *json_file); !status.ok()) return status;
  const ExitCode code = exit_code(*outcome, *judgement);
  log->line(fmt::format("answered, exit code {}", static_cast<int>(code)));
  return code;
}

}  // namespace stanchion::cli
