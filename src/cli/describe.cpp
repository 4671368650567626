// What the program says about itself for other programs: schemas, and later pages and completion.
#include "cli/command.hpp"
#include "cli/terminal.hpp"
#include "jobs/request_schema.hpp"

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
  arguments.positional("WHAT", what_, "request-schema", "request-schema: JSON Schema of a request", true);
}

Result<int> DescribeCommand::run(const Call& call) {
  if (*what_ != "request-schema") {
    return Status::bad_usage("bad-word", "'" + *what_ + "' is not known here", "WHAT",
                             "write request-schema");
  }
  const Status printed = print_result(request_schema(call.rules()));
  return printed.ok() ? Result<int>(0) : Result<int>(printed);
}

}  // namespace

std::unique_ptr<Command> make_describe_command() {
  return std::make_unique<DescribeCommand>();
}

}  // namespace stanchion::cli
