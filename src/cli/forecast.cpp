#include "cli/question_command.hpp"

namespace stanchion::cli {
namespace {

class ForecastCommand : public QuestionCommand {
 public:
  ForecastCommand() : QuestionCommand(Question::kForecast, run_forecast) {}
  const char* summary() const override { return "memory and time, before anything is factored"; }
  void declare(Arguments& arguments) override;
};

void ForecastCommand::declare(Arguments& arguments) {
  QuestionCommand::declare(arguments);
  arguments.closing(
      "Example:\n"
      "  stanchion forecast K.mtx --dofs dofs.csv");
}

}  // namespace

std::unique_ptr<Command> make_forecast_command() {
  return std::make_unique<ForecastCommand>();
}

}  // namespace stanchion::cli
