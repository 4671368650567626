// What the program says about itself for other programs: schemas, pages, completion.
#include <fmt/format.h>

#include "cli/command.hpp"
#include "cli/manual.hpp"
#include "cli/terminal.hpp"
#include "jobs/request_schema.hpp"
#include "model/version.hpp"

namespace stanchion::cli {
namespace {

class DescribeCommand : public Command {
 public:
  const char* name() const override { return "describe"; }
  const char* summary() const override { return "the program's options for other programs"; }
  void declare(Arguments& arguments) override;
  Result<int> run(const Call& call) override;

 private:
  std::optional<std::string> what_;
};

void DescribeCommand::declare(Arguments& arguments) {
  arguments.positional("WHAT", what_, "WHAT", "see below", true);
  arguments.closing(
      "  request-schema    JSON Schema of a request, as batch and serve take it\n"
      "  commands          the names of the commands, one a line\n"
      "  build             version, kind and compiler of this build\n"
      "  man, man-COMMAND  a page for man\n"
      "  bash, zsh, fish   completion for this shell\n\n"
      "Example:\n"
      "  source <(stanchion describe bash)");
}

/// The version, and below it what this build was made with.
std::string build_text() {
#ifdef NDEBUG
  const char* kind = "optimized";
#else
  const char* kind = "debug";
#endif
#if defined(__clang__)
  const std::string compiler = "clang " __clang_version__;
#else
  const std::string compiler = "gcc " __VERSION__;
#endif
  return fmt::format("{} {}\n{} build by {}\n", program_name(), program_version(), kind, compiler);
}

Result<std::string> described(const std::string& what, const RequestRules& rules) {
  if (what == "request-schema") return request_schema(rules);
  if (what == "build") return build_text();
  if (what == "man") return man_page(rules.commands);
  if (what == "bash") return bash_completion(rules.commands);
  if (what == "zsh") return zsh_completion(rules.commands);
  if (what == "fish") return fish_completion(rules.commands);
  std::string names;
  for (const CommandTable& table : rules.commands) {
    if (what == "man-" + table.name) return man_page(table);
    names += table.name + "\n";
  }
  if (what == "commands") return names;
  return Status::bad_usage("bad-word", "'" + what + "' cannot be described", "WHAT",
                           "stanchion describe --help lists what can");
}

Result<int> DescribeCommand::run(const Call& call) {
  const auto text = described(*what_, call.rules());
  if (!text.ok()) return text.status();
  const Status printed = print_result(*text);
  return printed.ok() ? Result<int>(0) : Result<int>(printed);
}

}  // namespace

std::unique_ptr<Command> make_describe_command() {
  return std::make_unique<DescribeCommand>();
}

}  // namespace stanchion::cli
