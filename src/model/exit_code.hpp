// The program's exit codes.
#pragma once

#include <optional>

#include "model/expectation.hpp"
#include "stanchion/outcome.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

enum ExitCode : int {
  kExitGood = 0,        ///< answered, and the good answer
  kExitNotGood = 1,     ///< answered, and not the good answer
  kExitUsage = 2,       ///< bad usage or bad input
  kExitUnresolved = 3,  ///< some asked statement has no certificate
  kExitResource = 4,    ///< memory cap, disk or time
  kExitInternal = 5,    ///< our own mistake
  kExitInterrupted = 130
};

ExitCode exit_code(StatusKind kind);

/// How an outcome is to be judged.
struct Judgement {
  bool symmetric_part = false;  ///< --symmetric-part: good only when an expectation says what good is
  std::optional<Expectation> expectation;
};

/// A sweep whose certified counts contradict each other is a defect (5), whatever is expected. audit: good
/// only when complete. check on a load path: good only when every step is. check: good only when positive
/// definite (or as expected). count, forecast: good when all is answered (or as expected). locate: good when
/// no cause is found; unresolved when a direction's sign or membership is. Unresolved as soon as an asked
/// statement has no certificate.
ExitCode exit_code(const Outcome& outcome, const Judgement& judgement);

}  // namespace stanchion
