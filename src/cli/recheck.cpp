#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "base/digest.hpp"
#include "base/mapped_file.hpp"
#include "cli/answer_file.hpp"
#include "cli/certificate_inputs.hpp"
#include "cli/command.hpp"
#include "cli/interrupt.hpp"
#include "cli/other_library.hpp"
#include "cli/progress_line.hpp"
#include "cli/question_targets.hpp"
#include "cli/request_options.hpp"
#include "cli/terminal.hpp"
#include "engine/library_recheck.hpp"
#include "engine/pipeline.hpp"
#include "engine/second_path.hpp"
#include "model/claims.hpp"
#include "model/exit_code.hpp"
#include "model/validate.hpp"
#include "model/value_claims.hpp"
#include "report/recheck_report.hpp"

namespace stanchion::cli {
namespace {

class RecheckCommand : public Command {
 public:
  const char* name() const override { return "recheck"; }
  const char* summary() const override { return "repeat the claim of a certificate by another path"; }
  void declare(Arguments& arguments) override;
  void refuse(const Status& why, const Call& call) override;
  Result<int> run(const Call& call) override;

 private:
  Status deliver(const RecheckReport& report, std::optional<AnswerFile>& file) const;

  std::optional<std::string> certificate_, json_, root_, with_;
  RequestOptions resources_;  ///< threads and memory cap only
  bool quiet_ = false;
};

void RecheckCommand::declare(Arguments& arguments) {
  arguments.positional("FILE", certificate_, "FILE", "a certificate written by --certificate", true);
  arguments.text("--root", root_, "DIR", "the folder in which the paths of the certificate are looked up");
  arguments.text("--json", json_, "FILE", "the comparison as JSON; - for standard output, nothing else");
  arguments.text("--with", with_, "own|mumps", "own: our second path alone; mumps: MUMPS besides, or fail");
  arguments.flag("--quiet", quiet_, "no text on standard output, no progress line");
  arguments.whole("--threads", resources_.threads, "N", "default: every processor available");
  arguments.text("--memory-cap", resources_.memory_cap, "SIZE", "stop before using more, e.g. 8G or 512M");
  arguments.closing(
      "The digests of the input files are verified first. Then the same question is asked again with\n"
      "another ordering, another seed and plain kernels, and every claim is compared. Where the module for\n"
      "MUMPS is there, that library makes the factorizations that decide the claims once more.\n"
      "Exit code 0: agreed; 1: contradicted; 2: the inputs or the certificate are not what they were; 3: "
      "the\n"
      "second path could not say as much.\n\n"
      "Example:\n"
      "  stanchion check K.mtx --certificate K.cert.json\n"
      "  stanchion recheck K.cert.json");
}

/// The second path asks for narrower intervals, so that they lie inside of those claimed.
constexpr double kSharper = 32;

/// The question of the certificate, with what this call allows.
Result<Request> second_request(const Request& claimed, const RequestOptions& resources, Question question) {
  RequestOptions options = resources;
  options.stiffness = claimed.input.stiffness;
  const auto allowed = build_request(options, Question::kForecast);
  if (!allowed.ok()) return allowed.status();
  Request request = by_second_path(claimed);
  request.bracket.width /= kSharper;
  request.threads = allowed->threads;
  request.memory_cap_bytes = allowed->memory_cap_bytes;
  if (Status status = validate(request, question); !status.ok()) return status;
  return request;
}

/// The module to ask: none with "own", an error when "mumps" is asked for and not there.
Result<std::unique_ptr<OtherLibrary>> library_to_ask(const std::optional<std::string>& with,
                                                     std::optional<Offset> most_bytes) {
  if (with && *with != "own" && *with != "mumps") {
    return Status::bad_usage("bad-with", "--with takes own or mumps, not '" + *with + "'", "--with",
                             "leave it out");
  }
  if (with == "own") return std::unique_ptr<OtherLibrary>();
  auto library = OtherLibrary::find(most_bytes);
  if (with && !library) {
    return Status::bad_usage("no-such-library", "the module for MUMPS is not there", "--with",
                             "build with libmumps-seq-dev installed, or recheck --with own");
  }
  return library;
}

/// The work above which a second look in extended precision would take too long to be done unasked.
constexpr double kCheapInExtended = 5e8;

/// Where the zero directions differ but neither statement excludes the other, a resolution that tells.
Result<std::vector<ClaimComparison>> compare_with_second_look(const Outcome& claimed, const Outcome& found,
                                                              Request request, const RunContext& context) {
  std::vector<ClaimComparison> comparisons = compare_claims(claimed, found);
  const bool may_differ = claimed.check && claimed.check->certificate.level != Level::kNone &&
                          claimed.check->inertia.zero != found.check->inertia.zero;
  if (!may_differ || worst(comparisons) == Agreement::kContradicted) return comparisons;
  std::vector<Request> looks;
  for (const double resolution : telling_resolutions(claimed.check->certificate, found.check->certificate)) {
    request.resolution = resolution;
    looks.push_back(request);
  }
  if (claimed.check->certificate.resolution && found.work.factor_flops < kCheapInExtended) {
    request.resolution = *claimed.check->certificate.resolution / 8;
    request.precision = Precision::kExtended;
    looks.push_back(request);
  }
  for (const Request& look : looks) {
    const auto again = run_check(look, context);
    if (!again.ok()) return again.status();
    auto sharper = compare_claims(claimed, *again);
    if (worst(sharper) == Agreement::kContradicted) return sharper;
  }
  return comparisons;
}

/// What the certificate says of distances without an eigenvalue is looked into by counts at their ends.
Result<std::vector<ClaimComparison>> compare_counts(const Outcome& claimed, const Outcome& found,
                                                    Request request, const RunContext& context) {
  request.shifts = interval_ends(claimed, found);
  if (request.shifts.empty()) return compare_claims(claimed, found);
  const auto ends = run_count(request, context);
  if (!ends.ok()) return ends.status();
  return compare_claims(claimed, found, ends->count->counts);
}

/// The engine digests what it reads: the files must not have changed between the verification and the work.
Status same_inputs(const Outcome& claimed_files, const std::vector<CertifiedFile>& files,
                   const Outcome& found) {
  std::size_t at = 0;
  for (const CertifiedFile& file : files) {
    if (!file.rows) continue;
    if (at >= found.inputs.size() || found.inputs[at].sha256 != file.sha256) return input_changed(file.path);
    ++at;
  }
  if (claimed_files.struck_sha256 == found.struck_sha256) return {};
  return Status::bad_input("input-changed",
                           "other equations are struck out than when the certificate was made",
                           files.front().path, "recheck with the program version that made the certificate");
}

Question question_of(const Outcome& claimed) {
  if (claimed.check) return Question::kCheck;
  if (claimed.bracket) return Question::kBracket;
  return claimed.audit ? Question::kAudit : Question::kCount;
}

Result<Outcome> ask_again(Question question, const Request& request, const RunContext& context) {
  switch (question) {
    case Question::kCheck:
      return run_check(request, context);
    case Question::kBracket:
      return run_bracket(request, context);
    case Question::kAudit:
      return run_audit(request, context);
    default:
      return run_count(request, context);
  }
}

/// A range that spans what the bracket says, in the pencil's own unit.
void ask_for_range(const BracketOutcome& claimed, Request& request) {
  BracketRequest& bracket = request.bracket;
  bracket.unit = request.pencil == Pencil::kMass ? ValueUnit::kOmega2 : ValueUnit::kFactor;
  if (claimed.complete) {
    if (std::isfinite(claimed.complete->from)) bracket.from = claimed.complete->from;
    bracket.to = claimed.complete->to;
    bracket.below = !bracket.from.has_value();
  } else if (!claimed.critical.empty()) {
    const CriticalValue &first = claimed.critical.front(), &last = claimed.critical.back();
    const double beyond = 1e-3 * std::max(std::fabs(first.low), std::fabs(last.high));
    bracket.from = first.low - beyond;
    bracket.to = last.high + beyond;
  } else {
    bracket.first = 1;
  }
}

/// Intervals that the second path did not settle are counted at their ends.
Result<std::vector<ClaimComparison>> compare_values(const Outcome& claimed, const Outcome& found,
                                                    Request request, const RunContext& context) {
  std::vector<ClaimComparison> comparisons = compare_claims(claimed, found);  // its risk
  if (claimed.audit && found.audit) {
    for (ClaimComparison& one : compare_audits(*claimed.audit, *found.audit))
      comparisons.push_back(std::move(one));
    return comparisons;
  }
  request.shifts = value_ends(*claimed.bracket, *found.bracket);
  std::vector<ShiftCount> counts;
  if (!request.shifts.empty()) {
    auto ends = run_count(request, context);
    if (!ends.ok()) return ends.status();
    counts = std::move(ends->count->counts);
  }
  for (ClaimComparison& one : compare_brackets(*claimed.bracket, *found.bracket, counts))
    comparisons.push_back(std::move(one));
  return comparisons;
}

Result<std::vector<ClaimComparison>> compare(Question question, const Outcome& claimed, const Outcome& found,
                                             const Request& request, const RunContext& context) {
  if (question == Question::kCheck) return compare_with_second_look(claimed, found, request, context);
  if (question == Question::kCount) return compare_counts(claimed, found, request, context);
  return compare_values(claimed, found, request, context);
}

Status RecheckCommand::deliver(const RecheckReport& report, std::optional<AnswerFile>& file) const {
  if (file) {
    if (Status status = file->commit(recheck_to_json(report)); !status.ok()) return status;
  }
  if (json_ == "-") return print_result(recheck_to_json(report));
  return quiet_ ? Status{} : print_result(recheck_to_text(report));
}

ExitCode code_of(Agreement agreement) {
  switch (agreement) {
    case Agreement::kAgreed:
      return kExitGood;
    case Agreement::kContradicted:
      return kExitNotGood;
    case Agreement::kNotRepeated:
      break;
  }
  return kExitUnresolved;
}

/// Without a certificate to compare with, an older comparison must not stay.
void RecheckCommand::refuse(const Status&, const Call& call) {
  OutputOptions output;
  output.json = json_;
  Targets targets;
  open_for_refusal(output, call.arguments, {certificate_.value_or("")}, targets);
}

Result<int> RecheckCommand::run(const Call& call) {
  const auto bytes = MappedFile::open(*certificate_);
  auto document = bytes.ok() ? read_certificate(bytes->bytes(), *certificate_)
                             : Result<CertificateDocument>(bytes.status());
  if (!document.ok()) {
    refuse(document.status(), call);
    return document.status();
  }
  auto json_file = open_recheck_answer(json_, *certificate_, *document);
  if (!json_file.ok()) return json_file.status();
  if (*json_file) (*json_file)->remove_older();
  if (Status status = find_inputs(*document, root_); !status.ok()) return status;

  const Question question = question_of(document->outcome);
  if (document->outcome.bracket) ask_for_range(*document->outcome.bracket, document->request);
  const bool values = question == Question::kBracket || question == Question::kAudit;
  if (values && with_ == "mumps") {
    return Status::bad_usage("no-such-library", "a library counts at shifts, not values in intervals",
                             "--with",
                             "leave it out, or make a certificate of count at the ends that matter");
  }
  const auto request = second_request(document->request, resources_, question);
  if (!request.ok()) return request.status();
  const auto library =
      library_to_ask(values ? std::optional<std::string>("own") : with_, request->memory_cap_bytes);
  if (!library.ok()) return library.status();
  use_plain_kernels();
  CancellationToken token;
  const InterruptGuard guard(token);
  ProgressLine line(standard_error_is_terminal() && !quiet_);
  RunContext context;
  context.cancel = &token;
  context.progress = [&line](const char* stage, double fraction) { line.update(stage, fraction); };
  auto found = ask_again(question, *request, context);
  if (!found.ok()) return found.status();
  if (Status status = same_inputs(document->outcome, document->files, *found); !status.ok()) return status;
  auto claims = compare(question, document->outcome, *found, *request, context);
  if (!claims.ok()) return claims.status();
  std::optional<LibraryComparison> compared;
  if (*library) {
    auto counts = count_by_library(
        *request, document->outcome, [&](const TripletMatrix& m) { return (*library)->count_negative(m); },
        context);
    if (!counts.ok()) return counts.status();
    compared = {(*library)->name(), (*library)->version(), std::move(*counts)};
  }
  line.erase();

  const RecheckReport report{*certificate_,     sha256(bytes->bytes()), document->program_version,
                             call.arguments,    std::move(*claims),     std::move(document->outcome),
                             std::move(*found), std::move(compared)};
  if (Status status = deliver(report, *json_file); !status.ok()) return status;
  return code_of(agreement_of(report));
}

}  // namespace

std::unique_ptr<Command> make_recheck_command() {
  return std::make_unique<RecheckCommand>();
}

}  // namespace stanchion::cli
