#include "cli/question_command.hpp"

namespace stanchion::cli {
namespace {

class BracketCommand : public QuestionCommand {
 public:
  BracketCommand() : QuestionCommand(Question::kBracket, run_bracket) {}
  const char* summary() const override {
    return "critical factors or frequencies, each in an interval that is proved";
  }
  void declare(Arguments& arguments) override;
};

void BracketCommand::declare(Arguments& arguments) {
  QuestionCommand::declare(arguments);
  arguments.closing(
      "Every value comes as [low, high] with its multiplicity and a proof, and certified counts at the ends\n"
      "of the range show that none is missing. The other side of 0 is looked at, too.\n\n"
      "Examples:\n"
      "  stanchion bracket K.mtx --geometric G.mtx --first 10\n"
      "  stanchion bracket K.mtx --geometric G.mtx --below 1.5 --expect none-below\n"
      "  stanchion bracket K.mtx --mass M.mtx --below 50 --unit hertz --modes shapes.csv");
}

}  // namespace

std::unique_ptr<Command> make_bracket_command() {
  return std::make_unique<BracketCommand>();
}

}  // namespace stanchion::cli
