// The files that an answer goes to: opened ahead of the work, never left with what an earlier run wrote.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "cli/answer_file.hpp"
#include "cli/certificate_file.hpp"
#include "report/refusal.hpp"
#include "stanchion/request.hpp"

namespace stanchion::cli {

/// Where the answer goes, as typed.
struct OutputOptions {
  std::optional<std::string> json, html, junit, csv, vtu, view, certificate, witness, log, title, reference,
      expectation;
  std::optional<std::string> svg, results, modes;
  std::optional<std::int64_t> progress_fd;
  bool quiet = false;
};

struct Targets {
  std::optional<AnswerFile> json, html, junit, csv, vtu, view, certificate, witness, svg, modes;
  std::vector<CertifiedFile> support_files;  ///< for the certificate
  bool opened = false;                       ///< all that were asked for
  bool answered = false;                     ///< there is an answer, which is being written
};

/// Opens every file that `output` names and removes what stood there before: a run that is refused, or
/// killed, leaves no answer of another one. Before that nothing is touched: bad usage "contradiction" when a
/// file is read as well or named twice, "cannot-write" where nothing can be written.
Status open_targets(const OutputOptions& output, const Request& request, Targets& targets);

/// The same for a question that was refused before its files were known for certain: what can be opened is,
/// unless it is among `read`, or `words` (the command line) name it twice and so may mean it to be read, or
/// what stands there is no document like those that are to be written.
void open_for_refusal(const OutputOptions& output, const std::vector<std::string>& words,
                      const std::vector<std::string>& read, Targets& targets);

/// Writes page and JUnit XML, those that are open and not written yet. Failures are passed over: another one
/// is being reported.
void deliver_refusal(Targets& targets, const Refusal& refusal);

}  // namespace stanchion::cli
