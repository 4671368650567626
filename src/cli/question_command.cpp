#include "cli/question_command.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <new>

#include "cli/certificate_file.hpp"
#include "cli/interrupt.hpp"
#include "cli/log_file.hpp"
#include "cli/mode_files.hpp"
#include "cli/progress_line.hpp"
#include "cli/sweep_results.hpp"
#include "cli/terminal.hpp"
#include "cli/witness_file.hpp"
#include "model/exit_code.hpp"
#include "model/names.hpp"
#include "model/version.hpp"
#include "report/csv_report.hpp"
#include "report/html.hpp"
#include "report/json.hpp"
#include "report/junit.hpp"
#include "report/staircase_svg.hpp"
#include "report/text.hpp"
#include "report/view_json.hpp"
#include "report/vtu.hpp"

namespace stanchion::cli {
namespace {

const char* expectations_of(Question question) {
  if (question == Question::kBracket) return "none-below; exit 1 if not";
  if (question == Question::kAudit) return "complete; exit 1 if not";
  return "positive-definite, zero:N or negative:N; exit 1 if not";
}

void declare_output_options(Arguments& arguments, OutputOptions& options, Question question) {
  arguments.group("Output", true);
  if (question != Question::kLocate) {
    arguments.text("--expect", options.expectation, "WHAT", expectations_of(question));
  }
  arguments.text("--json", options.json, "FILE",
                 "the whole answer as JSON; - for standard output, nothing else");
  arguments.text("--html", options.html, "FILE",
                 "one page for the screen and for paper, with drawings; stands alone");
  arguments.text("--junit", options.junit, "FILE", "JUnit XML, for build servers");
  arguments.text("--csv", options.csv, "FILE", "the numbers as one table");
  if (question == Question::kCheck || question == Question::kLocate) {
    arguments.text("--vtu", options.vtu, "FILE",
                   "nodes, links, motions and digits as a VTK grid (needs --nodes)");
    arguments.text("--view", options.view, "FILE",
                   "the same thinned to what a screen shows, as JSON (needs --nodes)");
  }
  if (question != Question::kLocate && question != Question::kForecast) {
    arguments.text("--certificate", options.certificate, "FILE",
                   "what was claimed and how, for `stanchion recheck FILE`");
  }
  if (question == Question::kCheck) {
    arguments.text("--witness", options.witness, "FILE",
                   "a vector x with x^T K x < 0 as CSV, if one is found");
  }
  if (question == Question::kSweep) {
    arguments.text("--svg", options.svg, "FILE", "the staircase as a picture");
    arguments.text("--results", options.results, "FILE",
                   "every count as it comes; an interrupted sweep goes on from it");
  }
  if (question == Question::kBracket) {
    arguments.text("--modes", options.modes, "FILE", "the mode shapes as CSV, or as a NumPy array (.npy)");
    arguments.text("--vtu", options.vtu, "FILE",
                   "the mode shapes on the nodes, as VTK XML; needs --nodes and --dofs");
  }
  arguments.flag("--quiet", options.quiet, "no text on standard output, no progress line");
  arguments.last().use = OptionUse::kRunner;
  arguments.text("--log", options.log, "FILE", "one line a stage; - for standard error");
  arguments.whole("--progress-fd", options.progress_fd, "N",
                  "progress and failures as JSON lines on this open file descriptor");
  arguments.last().use = OptionUse::kRunner;
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

/// Writes the witness, or says that there is none; the file then does not appear.
Status deliver_witness(const OutputOptions& output, const std::optional<std::string>& dofs, Targets& targets,
                       Outcome& outcome) {
  if (!output.witness) return {};
  auto& witness = outcome.check->witness;
  if (!witness) {
    const bool definite = outcome.check->verdict == Verdict::kPositiveDefinite;
    const Warning none{"no-witness",
                       definite ? "no vector with x^T K x < 0 exists, for K is positive definite"
                                : "no vector with x^T K x < 0 beyond its rounding was found",
                       *output.witness + " (not written)"};
    outcome.warnings.push_back(none);
    if (output.quiet) print_failure({StatusKind::kOk, none.code, none.message, none.place});
    return {};
  }
  const auto table = witness_table(*witness, dofs);
  if (!table.ok()) return table.status();
  if (Status status = targets.witness->commit(*table); !status.ok()) return status;
  witness->path = output.witness;
  return {};
}

/// Grid and view, or a warning that there is nothing to put on them; the files then do not appear.
Status deliver_grid(const OutputOptions& output, Targets& targets, Outcome& outcome) {
  if ((!targets.vtu && !targets.view) || outcome.bracket) return {};
  if (outcome.located && !outcome.located->picture.node.empty()) {
    Status status = targets.vtu ? targets.vtu->commit(to_vtu(*outcome.located)) : Status{};
    return status.ok() && targets.view ? targets.view->commit(to_view_json(*outcome.located)) : status;
  }
  const Warning none{"no-grid",
                     "there is nothing to put on a grid: no coordinates are known, or nothing was certified",
                     output.vtu.value_or(output.view.value_or("")) + " (not written)"};
  outcome.warnings.push_back(none);
  if (output.quiet) print_failure({StatusKind::kOk, none.code, none.message, none.place});
  return {};
}

/// The reports for people, spreadsheets and build servers.
Status deliver_reports(Targets& targets, const Outcome& outcome, ExitCode code) {
  const bool good = code == kExitGood, unresolved = code == kExitUnresolved;
  if (targets.html) {
    if (Status status = targets.html->commit(to_html(outcome, good, unresolved)); !status.ok()) return status;
  }
  if (targets.junit) {
    if (Status status = targets.junit->commit(to_junit(outcome, good, unresolved)); !status.ok())
      return status;
  }
  return targets.csv ? targets.csv->commit(to_csv(outcome)) : Status{};
}

/// Writes the shapes, or says that there are none; the files then do not appear.
Status deliver_modes(const Request& request, const OutputOptions& output, Targets& targets,
                     Outcome& outcome) {
  if (!outcome.bracket || (!targets.modes && !targets.vtu)) return {};
  const BracketOutcome& bracket = *outcome.bracket;
  const bool any = std::any_of(bracket.critical.begin(), bracket.critical.end(),
                               [](const CriticalValue& value) { return !value.modes.empty(); });
  if (!any) {
    outcome.warnings.push_back({"no-modes",
                                bracket.critical.empty() ? "there is no value, hence no mode shape"
                                                         : "bisection by counts gives no mode shapes",
                                output.modes.value_or(output.vtu.value_or("")) + " (not written)"});
    return {};
  }
  if (targets.modes) {
    const auto table = mode_table(bracket, request.input, *output.modes);
    if (!table.ok()) return table.status();
    if (Status status = targets.modes->commit(*table); !status.ok()) return status;
  }
  if (!targets.vtu) return {};
  const auto grid = mode_grid(bracket, request.input);
  return grid.ok() ? targets.vtu->commit(*grid) : grid.status();
}

/// Outputs that belong to one matrix, or to a range.
Status check_outputs(const Request& request, const OutputOptions& output, Question question) {
  const char* single = output.witness ? "--witness" : output.certificate ? "--certificate" : nullptr;
  if (!request.steps.empty() && single != nullptr) {
    return Status::bad_usage("contradiction", "this belongs to one matrix, not to a load path", single,
                             "ask it of the step that you want to know about");
  }
  if (request.bracket.safety && request.bracket.first) {
    return Status::bad_usage("contradiction", "of the first ones it is known that there are some", "--expect",
                             "give a range: --below B, or --from and --to");
  }
  if (output.vtu && question == Question::kBracket && (!request.input.nodes || !request.input.dofs)) {
    return Status::bad_usage("contradiction", "a grid of the nodes needs to know them", "--vtu",
                             "name the tables with --nodes and --dofs");
  }
  return {};
}

Status deliver(const Request& request, const OutputOptions& output, Targets& targets, Outcome& outcome,
               ExitCode code) {
  if (Status status = deliver_witness(output, request.input.dofs, targets, outcome); !status.ok())
    return status;
  if (targets.certificate) {
    const auto document = make_certificate(request, outcome, std::move(targets.support_files));
    if (Status status = targets.certificate->commit(certificate_to_json(document)); !status.ok())
      return status;
  }
  if (targets.svg) {
    const std::string picture = staircase_svg(outcome, request.sweep.geometric);
    if (Status status = targets.svg->commit(picture); !status.ok()) return status;
  }
  if (Status status = deliver_modes(request, output, targets, outcome); !status.ok()) return status;
  if (Status status = deliver_grid(output, targets, outcome); !status.ok()) return status;
  if (Status status = deliver_reports(targets, outcome, code); !status.ok()) return status;
  if (targets.json) {
    if (Status status = targets.json->commit(to_json(outcome)); !status.ok()) return status;
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
  declare_output_options(arguments, output_, question_);
}

Result<Outcome> QuestionCommand::ask(const Request& request, const LogFile& log, ProgressPipe& pipe,
                                     const CancellationToken& token) const {
  // A log on the same terminal would be torn apart by the line.
  ProgressLine line(standard_error_is_terminal() && !output_.quiet && !log.to_standard_error());
  RunContext context;
  context.cancel = &token;
  context.progress = [&line, &pipe](const char* stage, double fraction) {
    line.update(stage, fraction);
    pipe.update(stage, fraction);
  };
  std::optional<SweepResults> results;
  if (output_.results) context.journal = &results.emplace(*output_.results, request);
  context.log = [&log](const std::string& text) { log.line(text); };
  return engine_(request, context);
}

Result<Request> QuestionCommand::make_request() const {
  auto request = build_request(request_, question_);
  if (!request.ok()) return request;
  request->want_witness = output_.witness.has_value();
  if ((output_.vtu || output_.view) && question_ == Question::kCheck && !request->want_location) {
    return Status::bad_usage("contradiction", "a grid shows located motions, and none are asked for",
                             output_.vtu ? "--vtu" : "--view", "add --locate, or use stanchion locate");
  }
  const auto judgement = build_judgement(output_, request_.symmetric_part, question_);
  if (!judgement.ok()) return judgement.status();
  request->bracket.safety =
      judgement->expectation && judgement->expectation->kind == Expectation::Kind::kNoneBelow;
  request->bracket.want_modes = question_ == Question::kBracket && (output_.modes || output_.vtu);
  if (Status status = check_outputs(*request, output_, question_); !status.ok()) return status;
  return request;
}

Status QuestionCommand::check_options() {
  return make_request().status();
}

void QuestionCommand::refuse(const Status& why, const Call& call) {
  Targets targets;
  refuse(why, call, targets);
}

void QuestionCommand::refuse(const Status& why, const Call& call, Targets& targets) const {
  const auto files = files_named(request_);
  if (!targets.opened) {
    std::vector<std::string> read;
    for (const TableRecord& file : files) read.push_back(file.path);
    open_for_refusal(output_, call.arguments, read, targets);
  }
  deliver_refusal(targets, {name(), call.arguments, output_.title, output_.reference, files, why,
                            exit_code(why.kind()), targets.answered});
}

Result<int> QuestionCommand::run(const Call& call) {
  CancellationToken token;
  const InterruptGuard guard(token);  // before anything is opened: a request to stop leaves nothing behind
  if (output_.progress_fd && (*output_.progress_fd < 3 || *output_.progress_fd > 65535)) {
    return Status::bad_usage("out-of-range", "this is no file descriptor to write progress to",
                             "--progress-fd", "give one from 3 that the program was started with");
  }
  ProgressPipe pipe(static_cast<int>(output_.progress_fd.value_or(-1)));
  Targets targets;
  auto code = [&]() -> Result<int> {
    try {
      return answer(call, pipe, token, targets);
    } catch (const std::bad_alloc&) {
      return out_of_memory();
    }
  }();
  if (code.ok()) return code;
  pipe.fail(code.status());
  refuse(code.status(), call, targets);
  return code;
}

Result<int> QuestionCommand::answer(const Call& call, ProgressPipe& pipe, const CancellationToken& token,
                                    Targets& targets) {
  auto request = make_request();
  if (!request.ok()) return request.status();
  const auto judgement = build_judgement(output_, request_.symmetric_part, question_);
  if (!judgement.ok()) return judgement.status();
  if (Status status = open_targets(output_, *request, targets); !status.ok()) return status;
  const auto log = LogFile::open(output_.log);
  if (!log.ok()) return log.status();

  log->line(fmt::format("{} {}: {}", program_name(), program_version(), fmt::join(call.arguments, " ")));
  auto outcome = ask(*request, *log, pipe, token);

  if (!outcome.ok()) {
    log->line(outcome.status().to_string());
    return outcome.status();
  }
  targets.answered = true;
  outcome->command = name();
  outcome->arguments = call.arguments;
  outcome->title = output_.title;
  outcome->reference = output_.reference;
  const ExitCode code = exit_code(*outcome, *judgement);
  if (Status status = deliver(*request, output_, targets, *outcome, code); !status.ok()) return status;
  log->line(fmt::format("answered, exit code {}", static_cast<int>(code)));
  return code;
}

}  // namespace stanchion::cli
