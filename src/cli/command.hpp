// One command of the program: its options, and what it does once they are known.
#pragma once

#include <functional>
#include <memory>
#include <string>
#include <vector>

#include "cli/arguments.hpp"
#include "jobs/job_request.hpp"

namespace stanchion::cli {

/// What every command gets from the call of the program.
struct Call {
  std::vector<std::string> arguments;   ///< as typed, without the program's own name
  std::function<RequestRules()> rules;  ///< of the commands that jobs may ask for
};

class Command {
 public:
  virtual ~Command() = default;
  virtual const char* name() const = 0;
  virtual const char* summary() const = 0;
  virtual void declare(Arguments& arguments) = 0;
  /// Jobs may ask for it.
  virtual bool requestable() const { return false; }
  /// What is wrong with the options as a whole, without reading a file; run() says it as well.
  virtual Status check_options() { return {}; }
  /// Tells the files asked for that `why` stood before the work; run() does so itself. Options may be known
  /// in part only.
  virtual void refuse(const Status& why, const Call& call) {
    (void)why;
    (void)call;
  }
  /// Does the work and prints; returns the exit code, or the failure for the caller to print.
  virtual Result<int> run(const Call& call) = 0;
};

std::unique_ptr<Command> make_check_command();
std::unique_ptr<Command> make_count_command();
std::unique_ptr<Command> make_sweep_command();
std::unique_ptr<Command> make_bracket_command();
std::unique_ptr<Command> make_audit_command();
std::unique_ptr<Command> make_locate_command();
std::unique_ptr<Command> make_forecast_command();
std::unique_ptr<Command> make_specimen_command();
std::unique_ptr<Command> make_convert_command();
std::unique_ptr<Command> make_selftest_command();
std::unique_ptr<Command> make_recheck_command();
std::unique_ptr<Command> make_batch_command();
std::unique_ptr<Command> make_describe_command();
std::unique_ptr<Command> make_serve_command();

}  // namespace stanchion::cli
