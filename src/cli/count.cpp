#include "cli/question_command.hpp"

namespace stanchion::cli {
namespace {

class CountCommand : public QuestionCommand {
 public:
  CountCommand() : QuestionCommand(Question::kCount, run_count) {}
  const char* summary() const override { return "how many eigenvalues or critical factors below a value"; }
  void declare(Arguments& arguments) override;
};

void CountCommand::declare(Arguments& arguments) {
  QuestionCommand::declare(arguments);
  arguments.closing(
      "Without --geometric or --mass the eigenvalues of K itself are counted, in its mixed units.\n"
      "Counted are eigenvalues strictly below s (--mass, or K alone), or critical factors between 0\n"
      "and f (--geometric; f of either sign).\n\n"
      "Examples:\n"
      "  stanchion count K.mtx --geometric G.mtx --at 1.0,1.5,-1.5\n"
      "  stanchion count K.mtx --mass M.mtx --at 3947.8\n"
      "  stanchion count K.mtx --at 0");
}

}  // namespace

std::unique_ptr<Command> make_count_command() {
  return std::make_unique<CountCommand>();
}

}  // namespace stanchion::cli
