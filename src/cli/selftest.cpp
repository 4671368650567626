#include "dense/selftest.hpp"

#include <fmt/format.h>

#include <nlohmann/json.hpp>

#include "cli/answer_file.hpp"
#include "cli/command.hpp"
#include "cli/terminal.hpp"
#include "dense/blas.hpp"
#include "report/page.hpp"

namespace stanchion::cli {
namespace {

std::string text_of(const std::vector<SelftestLine>& lines) {
  std::vector<std::vector<std::string>> rows;
  for (const SelftestLine& line : lines) {
    rows.push_back({fmt::format("{:.1f} ms", 1e3 * line.seconds), line.ok() ? "ok" : "wrong",
                    line.ok() ? line.what : line.what + ": " + line.wrong});
  }
  Page page;
  page.table(rows, 1);
  page.blank();
  page.sentence(selftest_status(lines).ok() ? "The arithmetic is as the error bounds assume."
                                            : "The arithmetic is not as the error bounds assume.");
  return page.text();
}

std::string json_of(const std::vector<SelftestLine>& lines) {
  nlohmann::ordered_json document;
  document["schema_version"] = 1;
  document["command"] = "selftest";
  document["ok"] = selftest_status(lines).ok();
  document["blas"] = blas_description();
  document["tests"] = nlohmann::ordered_json::array();
  for (const SelftestLine& line : lines) {
    nlohmann::ordered_json entry;
    entry["what"] = line.what;
    entry["ok"] = line.ok();
    if (!line.ok()) entry["wrong"] = line.wrong;
    if (!line.ok()) entry["remedy"] = line.remedy;
    entry["seconds"] = line.seconds;
    document["tests"].push_back(entry);
  }
  return document.dump(2, ' ', false, nlohmann::ordered_json::error_handler_t::replace) + "\n";
}

class SelftestCommand : public Command {
 public:
  const char* name() const override { return "selftest"; }
  const char* summary() const override {
    return "does this machine, with its BLAS, compute as the proofs assume";
  }
  void declare(Arguments& arguments) override;
  Result<int> run(const Call& call) override;

 private:
  Status deliver(const std::vector<SelftestLine>& lines, std::optional<AnswerFile>& file) const;

  std::optional<std::string> json_;
  bool quick_ = false, quiet_ = false;
};

void SelftestCommand::declare(Arguments& arguments) {
  arguments.flag("--quick", quick_, "only what a long job tries at its start");
  arguments.text("--json", json_, "FILE", "the lines as JSON; - is standard output");
  arguments.flag("--quiet", quiet_, "say nothing when all is well");
  arguments.closing(
      "Exit code 0 when everything computes as assumed, 5 when something does not; the remedy is then "
      "printed.\n\n"
      "Example:\n"
      "  stanchion selftest");
}

Status SelftestCommand::deliver(const std::vector<SelftestLine>& lines,
                                std::optional<AnswerFile>& file) const {
  if (file) {
    if (Status status = file->commit(json_of(lines)); !status.ok()) return status;
  }
  if (json_ == "-") return print_result(json_of(lines));
  return quiet_ ? Status{} : print_result(text_of(lines));
}

Result<int> SelftestCommand::run(const Call&) {
  std::optional<AnswerFile> file;
  if (json_ && *json_ != "-") {
    auto opened = AnswerFile::open(*json_);
    if (!opened.ok()) return opened.status();
    file = std::move(*opened);
    file->remove_older();
  }
  const auto lines = selftest(quick_ ? SelftestLevel::kQuick : SelftestLevel::kFull);
  if (Status status = deliver(lines, file); !status.ok()) return status;
  if (Status sound = selftest_status(lines); !sound.ok()) return sound;
  return 0;
}

}  // namespace

std::unique_ptr<Command> make_selftest_command() {
  return std::make_unique<SelftestCommand>();
}

}  // namespace stanchion::cli
