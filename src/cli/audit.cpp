#include "cli/question_command.hpp"

namespace stanchion::cli {
namespace {

class AuditCommand : public QuestionCommand {
 public:
  AuditCommand() : QuestionCommand(Question::kAudit, run_audit) {}
  const char* summary() const override {
    return "is somebody's list of values complete, and is everything in it real";
  }
  void declare(Arguments& arguments) override;
};

void AuditCommand::declare(Arguments& arguments) {
  QuestionCommand::declare(arguments);
  arguments.closing(
      "The list is a CSV with the column value, optionally tolerance (half a width, in the unit of the\n"
      "values) and label. A list of factors of one sign is judged from 0 on, one of frequencies from the\n"
      "lowest, for what is missing below the first value matters most. Exit code 0: complete, 1: not.\n\n"
      "Examples:\n"
      "  stanchion audit K.mtx --geometric G.mtx --values factors.csv\n"
      "  stanchion audit K.mtx --mass M.mtx --values modes.csv --unit hertz --find-missing");
}

}  // namespace

std::unique_ptr<Command> make_audit_command() {
  return std::make_unique<AuditCommand>();
}

}  // namespace stanchion::cli
