// The composition root: which commands there are, and the last net for what nobody caught.
#include <exception>
#include <memory>
#include <new>
#include <string>
#include <vector>

#include "base/large_heap.hpp"
#include "cli/command_line.hpp"
#include "cli/terminal.hpp"
#include "dense/blas.hpp"
#include "model/exit_code.hpp"

namespace {

using stanchion::Status;

std::vector<std::unique_ptr<stanchion::cli::Command>> all_commands() {
  std::vector<std::unique_ptr<stanchion::cli::Command>> commands;
  commands.push_back(stanchion::cli::make_check_command());
  commands.push_back(stanchion::cli::make_count_command());
  commands.push_back(stanchion::cli::make_sweep_command());
  commands.push_back(stanchion::cli::make_bracket_command());
  commands.push_back(stanchion::cli::make_audit_command());
  commands.push_back(stanchion::cli::make_locate_command());
  commands.push_back(stanchion::cli::make_forecast_command());
  commands.push_back(stanchion::cli::make_batch_command());
  commands.push_back(stanchion::cli::make_specimen_command());
  commands.push_back(stanchion::cli::make_convert_command());
  commands.push_back(stanchion::cli::make_selftest_command());
  commands.push_back(stanchion::cli::make_recheck_command());
  commands.push_back(stanchion::cli::make_serve_command());
  commands.push_back(stanchion::cli::make_describe_command());
  return commands;
}

int run(const std::vector<std::string>& arguments) {
  const auto code = stanchion::cli::run_command_line(all_commands, arguments);
  if (code.ok()) return *code;
  stanchion::cli::print_failure(code.status());
  return stanchion::exit_code(code.status().kind());
}

int fail(const Status& failure) {
  stanchion::cli::print_failure(failure);
  return stanchion::exit_code(failure.kind());
}

}  // namespace

bool stanchion::wants_large_heap(int argc, char** argv) {
  constexpr long long kWorthBeginningAnew = 8 << 20;  // below, beginning (17 ms) takes what it saves
  return bytes_of_named_files(argc, argv) >= kWorthBeginningAnew;
}

int main(int argc, char** argv) {
  stanchion::end_blas_threads();
  try {
    return run(std::vector<std::string>(argv + (argc > 0 ? 1 : 0), argv + argc));
  } catch (const std::bad_alloc&) {
    return fail(stanchion::cli::out_of_memory());
  } catch (const std::exception& error) {
    return fail(Status::internal(error.what()));
  }
}
