// What check, count and forecast have in common: options to a request, the request to the engine, the outcome
// to the places asked, and the exit code.
#pragma once

#include "base/cancellation.hpp"
#include "cli/command.hpp"
#include "cli/question_targets.hpp"
#include "cli/request_options.hpp"
#include "engine/pipeline.hpp"
#include "jobs/progress_pipe.hpp"

namespace stanchion::cli {

class QuestionCommand : public Command {
 public:
  using Engine = Result<Outcome> (*)(const Request&, const RunContext&);
  QuestionCommand(Question question, Engine engine) : question_(question), engine_(engine) {}

  const char* name() const override;
  void declare(Arguments& arguments) override;
  bool requestable() const override { return true; }
  Status check_options() override;
  void refuse(const Status& why, const Call& call) override;
  Result<int> run(const Call& call) override;

 private:
  Result<Request> make_request() const;
  Result<int> answer(const Call& call, ProgressPipe& pipe, const CancellationToken& token, Targets& targets);
  void refuse(const Status& why, const Call& call, Targets& targets) const;
  Result<Outcome> ask(const Request& request, const class LogFile& log, ProgressPipe& pipe,
                      const CancellationToken& token) const;

  Question question_;
  Engine engine_;
  RequestOptions request_;
  OutputOptions output_;
};

}  // namespace stanchion::cli
