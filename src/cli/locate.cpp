#include "cli/question_command.hpp"

namespace stanchion::cli {
namespace {

class LocateCommand : public QuestionCommand {
 public:
  LocateCommand() : QuestionCommand(Question::kLocate, run_locate) {}
  const char* summary() const override {
    return "which nodes carry the zero, negative and weak directions, and why";
  }
  void declare(Arguments& arguments) override;
};

void LocateCommand::declare(Arguments& arguments) {
  QuestionCommand::declare(arguments);
  arguments.closing(
      "Exit code 0: nothing located; 1: causes found; 3: the sign or the place of a direction is "
      "unresolved.\n\n"
      "Examples:\n"
      "  stanchion locate K.mtx --dofs dofs.csv --nodes nodes.csv\n"
      "  stanchion locate K.mtx --dofs dofs.csv --nodes nodes.csv --mass M.mtx --json answer.json");
}

}  // namespace

std::unique_ptr<Command> make_locate_command() {
  return std::make_unique<LocateCommand>();
}

}  // namespace stanchion::cli
