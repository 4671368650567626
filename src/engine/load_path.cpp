#include "engine/load_path.hpp"

#include "engine/check_model.hpp"

namespace stanchion {
namespace {

bool same_signs(const Inertia& a, const Inertia& b) {
  return a.negative == b.negative && a.zero == b.zero && a.positive == b.positive &&
         a.undecided == b.undecided;
}

class LoadPath {
 public:
  LoadPath(const Request& request, const RunContext& context, ThreadPool& pool)
      : request_(request), context_(context), pool_(pool) {}

  Result<Outcome> run(ModelInput first, Outcome outcome) {
    first_input_ = outcome.inputs.front();
    rows_ = outcome.rows_analysed + outcome.rows_struck;
    auto judged = step(std::move(first), std::move(outcome));
    if (!judged.ok()) return judged;
    for (const std::string& path : request_.steps) {
      if (context_.progress) {
        context_.progress("steps", static_cast<double>(path_.steps.size()) /
                                       static_cast<double>(request_.steps.size() + 1));
      }
      judged = next(path, std::move(*judged));
      if (!judged.ok()) return judged;
    }
    judged->inputs = std::move(inputs_);
    judged->tables = std::move(tables_);
    judged->path = std::move(path_);
    judged->check = std::move(deciding_);
    if (shared_.reused < static_cast<Index>(request_.steps.size())) {
      judged->warnings.push_back({"pattern-changes",
                                  "not all matrices have one pattern: those that differ from the one before "
                                  "were analysed anew",
                                  first_input_.path});
    }
    return judged;
  }

 private:
  Result<Outcome> next(const std::string& path, Outcome outcome) {
    Request one = request_;
    one.steps.clear();
    one.input.stiffness = path;
    outcome.inputs.clear();
    outcome.tables.clear();
    outcome.rows_struck = 0;
    auto model = read_model(one, context_, pool_, outcome);
    if (!model.ok()) return model.status();
    if (outcome.rows_analysed + outcome.rows_struck != rows_) {
      return Status::bad_input("size-mismatch",
                               "the matrix has " +
                                   std::to_string(outcome.rows_analysed + outcome.rows_struck) +
                                   " equations, the first of the load path has " + std::to_string(rows_),
                               path, "name matrices of one model");
    }
    return step(std::move(*model), std::move(outcome));
  }

  Result<Outcome> step(ModelInput model, Outcome outcome) {
    const InputRecord input = outcome.inputs.front();
    if (inputs_.empty()) {
      inputs_ = outcome.inputs;
      tables_ = outcome.tables;  // every step reads the same ones
    }
    auto judged = check_model(std::move(model), request_, context_, pool_, std::move(outcome), &shared_);
    if (!judged.ok()) return judged;
    const CheckOutcome& check = *judged->check;
    PathStep step{input.path, input.sha256, check.verdict, check.inertia, check.certificate, false};
    if (check.verdict_for_digits && *check.verdict_for_digits != check.verdict)
      step.verdict = *check.verdict_for_digits;
    step.changed = !path_.steps.empty() && !same_signs(path_.steps.back().inertia, step.inertia);
    path_.steps.push_back(step);
    const auto number = static_cast<Index>(path_.steps.size());
    if (!path_.first_negative && check.certificate.level != Level::kNone && check.inertia.negative > 0) {
      path_.first_negative = number;
    }
    if (!path_.first_not_definite) deciding_ = check;
    if (!path_.first_not_definite && step.verdict != Verdict::kPositiveDefinite)
      path_.first_not_definite = number;
    return judged;
  }

  const Request& request_;
  const RunContext& context_;
  ThreadPool& pool_;
  SharedAnalysis shared_;
  PathOutcome path_;
  CheckOutcome deciding_;
  std::vector<InputRecord> inputs_;
  std::vector<TableRecord> tables_;
  InputRecord first_input_;
  Index rows_ = 0;
};

}  // namespace

Result<Outcome> check_load_path(ModelInput first, const Request& request, const RunContext& context,
                                ThreadPool& pool, Outcome outcome) {
  return LoadPath(request, context, pool).run(std::move(first), std::move(outcome));
}

}  // namespace stanchion
