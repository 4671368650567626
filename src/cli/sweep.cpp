#include "cli/question_command.hpp"

namespace stanchion::cli {
namespace {

class SweepCommand : public QuestionCommand {
 public:
  SweepCommand() : QuestionCommand(Question::kSweep, run_sweep) {}
  const char* summary() const override { return "the staircase of counts over a range of shifts"; }
  void declare(Arguments& arguments) override;
};

void SweepCommand::declare(Arguments& arguments) {
  QuestionCommand::declare(arguments);
  arguments.closing(
      "Shifts run side by side where the memory forecast allows, else one at a time with all threads;\n"
      "the answer is the same. With --results every count is written as it comes, and the same command\n"
      "given again after an interruption goes on from there.\n\n"
      "Examples:\n"
      "  stanchion sweep K.mtx --geometric G.mtx --from 0.5 --to 3 --points 11 --refine\n"
      "  stanchion sweep K.mtx --mass M.mtx --from 1e3 --to 1e6 --spacing geometric --svg steps.svg");
}

}  // namespace

std::unique_ptr<Command> make_sweep_command() {
  return std::make_unique<SweepCommand>();
}

}  // namespace stanchion::cli
