#include "cli/question_command.hpp"

namespace stanchion::cli {
namespace {

class CheckCommand : public QuestionCommand {
 public:
  CheckCommand() : QuestionCommand(Question::kCheck, run_check) {}
  const char* summary() const override {
    return "is K positive definite; if not, its negative and zero directions";
  }
  void declare(Arguments& arguments) override;
};

void CheckCommand::declare(Arguments& arguments) {
  QuestionCommand::declare(arguments);
  arguments.closing(
      "Examples:\n"
      "  stanchion check K.mtx\n"
      "  stanchion check step1.mtx step2.mtx step3.mtx (a load path)\n"
      "  stanchion check K.mtx --add Gdead.mtx:1.35 --expect positive-definite\n"
      "  stanchion check free.mtx --expect zero:6 --json answer.json");
}

}  // namespace

std::unique_ptr<Command> make_check_command() {
  return std::make_unique<CheckCommand>();
}

}  // namespace stanchion::cli
