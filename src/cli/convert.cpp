#include "io/convert.hpp"

#include <fmt/format.h>

#include "cli/command.hpp"
#include "cli/request_options.hpp"
#include "cli/terminal.hpp"
#include "model/numbers.hpp"
#include "report/page.hpp"
#include "report/text_sections.hpp"

namespace stanchion::cli {
namespace {

class ConvertCommand : public Command {
 public:
  const char* name() const override { return "convert"; }
  const char* summary() const override { return "between matrix formats"; }
  void declare(Arguments& arguments) override;
  Result<int> run(const Call& call) override;

 private:
  RequestOptions request_;
  std::optional<std::string> out_, dofs_out_;
  bool mass_ = false, quiet_ = false;
};

void ConvertCommand::declare(Arguments& arguments) {
  arguments.positional("IN", request_.stiffness, "FILE", "the matrix; its format is found from its content",
                       true);
  arguments.positional("OUT", out_, "FILE", "its name says the format: .mtx .mtx.gz .npz .h5 .rb .csv .txt",
                       true);
  arguments.group("Reading");
  arguments.flag("--mass", mass_, "IN is a mass and may be a vector of diagonal entries");
  arguments.flag("--symmetric-part", request_.symmetric_part,
                 "take (K + K^T)/2 of a matrix that is not symmetric");
  arguments.whole("--base", request_.base, "0|1", "number of the first equation in triplet text");
  arguments.whole("--rows", request_.rows, "N", "equations of a triplet text whose last rows are empty");
  arguments.text("--dofs", request_.dofs, "FILE", "equation,node,dof: numbers node-keyed triplets");
  arguments.text("--dofs-out", dofs_out_, "FILE", "where to write the numbering that was chosen");
  arguments.group("Resources");
  arguments.whole("--threads", request_.threads, "N", "default: every processor available");
  arguments.text("--memory-cap", request_.memory_cap, "SIZE", "stop before using more, e.g. 8G or 512M");
  arguments.flag("--quiet", quiet_, "write the file, say nothing");
  arguments.closing("Example:\n  stanchion convert K.mtx K.npz");
}

Result<int> ConvertCommand::run(const Call&) {
  const auto request = build_request(request_, Question::kForecast);
  if (!request.ok()) return request.status();
  ConvertOptions options;
  options.read.role = mass_ ? MatrixRole::kMass : MatrixRole::kStiffness;
  options.read.symmetric_part = request->input.symmetric_part;
  options.read.base = request->input.base;
  options.read.rows = request->input.rows;
  options.read.memory_limit_bytes = request->memory_cap_bytes;
  options.dofs_out = dofs_out_.value_or("");
  Warnings warnings;
  std::optional<DofMap> dofs;
  if (request->input.dofs) {
    auto map = read_dof_map(*request->input.dofs, warnings);
    if (!map.ok()) return map.status();
    dofs = std::move(*map);
    options.read.dofs = &*dofs;
  }
  ThreadPool pool(request->threads > 0 ? request->threads : available_processors());
  const auto done = convert(request->input.stiffness, *out_, options, pool);
  if (!done.ok()) return done.status();
  if (quiet_) return 0;

  warnings.insert(warnings.end(), done->warnings.begin(), done->warnings.end());
  Page page;
  page.sentence(fmt::format("{} written: {} equations, {} entries in the lower triangle (read as {}).", *out_,
                            grouped(done->rows), grouped(done->entries), done->from_format));
  write_warnings(page, warnings);
  if (Status status = print_result(page.text()); !status.ok()) return status;
  return 0;
}

}  // namespace

std::unique_ptr<Command> make_convert_command() {
  return std::make_unique<ConvertCommand>();
}

}  // namespace stanchion::cli
