#include "specimen/specimen.hpp"

#include <fmt/format.h>

#include <filesystem>
#include <system_error>

#include "cli/command.hpp"
#include "cli/terminal.hpp"
#include "io/output_file.hpp"
#include "io/write_matrix.hpp"
#include "model/numbers.hpp"
#include "report/page.hpp"
#include "specimen/specimen_text.hpp"

namespace stanchion::cli {
namespace {

struct SpecimenArguments {
  std::optional<std::string> name, out, format, fault, load, edges, ends, mass;
  std::optional<std::int64_t> unknowns;
  std::optional<double> aspect, offset, softness;
  bool list = false, quiet = false;
};

/// Sets `member` from the word given, if any, by the parser of its kind.
template <class Kind>
Status choose(const std::optional<std::string>& word, Result<Kind> (*parse)(const std::string&),
              Kind& member) {
  if (!word) return {};
  const auto kind = parse(*word);
  if (kind.ok()) member = *kind;
  return kind.status();
}

Result<SpecimenOptions> build_options(const SpecimenArguments& given) {
  SpecimenOptions options;
  for (const Status& status :
       {choose(given.fault, fault_from, options.fault), choose(given.load, plate_load_from, options.load),
        choose(given.edges, plate_edges_from, options.edges),
        choose(given.ends, column_ends_from, options.ends),
        choose(given.mass, mass_kind_from, options.mass)}) {
    if (!status.ok()) return status;
  }
  options.aspect = given.aspect.value_or(options.aspect);
  options.offset = given.offset.value_or(options.offset);
  options.softness = given.softness.value_or(options.softness);
  return options;
}

std::string list_of_models() {
  Page page;
  for (const SpecimenEntry& entry : specimen_list()) {
    page.row(entry.name, entry.line);
    if (*entry.faults != '\0') page.row("", fmt::format("faults: {}", entry.faults));
  }
  return page.text();
}

/// Writes the files of one specimen into one folder and remembers their names.
class SpecimenWriter {
 public:
  SpecimenWriter(std::string folder, std::string extension)
      : folder_(std::move(folder)), extension_(std::move(extension)) {}

  Status write(const Specimen& specimen) {
    add(matrix("K", specimen.stiffness));
    if (specimen.geometric) add(matrix("G", *specimen.geometric));
    if (specimen.mass) add(matrix("M", *specimen.mass));
    add(text("dofs.csv", dofs_csv(specimen)));
    add(text("nodes.csv", nodes_csv(specimen)));
    if (!specimen.multipliers.empty()) add(text("multipliers.txt", multipliers_text(specimen)));
    add(text("expected.json", expected_json(specimen)));
    return status_;
  }

  const std::string& names() const { return names_; }

 private:
  void add(const Status& status) {
    if (status_.ok()) status_ = status;
  }

  std::string path_of(const std::string& name) {
    names_ += (names_.empty() ? "" : ", ") + name;
    return (std::filesystem::path(folder_) / name).string();
  }

  Status matrix(const std::string& name, const SymmetricMatrix& values) {
    return status_.ok() ? write_matrix(values, path_of(name + "." + extension_)) : status_;
  }

  Status text(const std::string& name, const std::string& content) {
    if (!status_.ok()) return status_;
    OutputFile file(path_of(name), false);
    file.write(content);
    return file.commit();
  }

  std::string folder_, extension_, names_;
  Status status_;
};

std::string description(const Specimen& specimen, const std::string& folder, const std::string& names) {
  Page page;
  page.sentence(specimen.scenario);
  page.blank();
  page.row("equations", grouped(specimen.stiffness.rows));
  page.row("entries", grouped(specimen.stiffness.entries()) + " in the lower triangle of K");
  const ExpectedInertia& inertia = specimen.expected.inertia;
  page.row("known", fmt::format("{} negative, {} zero, {} positive: {}", grouped(inertia.negative),
                                grouped(inertia.zero), grouped(inertia.positive), inertia.why));
  page.row("written", fmt::format("{} in {}", names, folder));
  return page.text();
}

Status make_folder(const std::string& folder) {
  std::error_code failure;
  std::filesystem::create_directories(folder, failure);
  if (!failure) return {};
  return Status::bad_usage("cannot-write",
                           fmt::format("cannot make the folder {}: {}", folder, failure.message()), "--out",
                           "name a folder that you may write to");
}

class SpecimenCommand : public Command {
 public:
  const char* name() const override { return "specimen"; }
  const char* summary() const override { return "an invented model to try things on"; }
  void declare(Arguments& arguments) override;
  Result<int> run(const Call& call) override;

 private:
  Status check() const;

  SpecimenArguments given_;
};

void SpecimenCommand::declare(Arguments& arguments) {
  arguments.positional("NAME", given_.name, "MODEL", "which model; see --list", false);
  arguments.flag("--list", given_.list, "list the models and their faults");
  arguments.whole("--unknowns", given_.unknowns, "N", "about how many equations");
  arguments.text("--out", given_.out, "DIR", "folder for the files; made if need be");
  arguments.text("--format", given_.format, "EXT", "mtx (default), mtx.gz, npz, h5, rb or csv");
  arguments.flag("--quiet", given_.quiet, "write the files, say nothing");
  arguments.group("What may vary (where the model knows it)");
  arguments.text("--fault", given_.fault, "FAULT", "a defect planted on purpose; see --list");
  arguments.text("--load", given_.load, "KIND", "plate: uniaxial, biaxial or shear");
  arguments.text("--edges", given_.edges, "KIND", "plate: simple or clamped");
  arguments.text("--ends", given_.ends, "KIND", "column: fixed-free, pinned-pinned, fixed-pinned, ...");
  arguments.text("--mass", given_.mass, "KIND", "consistent or lumped");
  arguments.real("--aspect", given_.aspect, "RATIO", "plate: length over width; cylinder: over radius");
  arguments.real("--offset", given_.offset, "METRES", "plate: middle surface above the nodes");
  arguments.real("--softness", given_.softness, "RATIO", "soft springs over a typical stiffness");
  arguments.closing(
      "Writes K, G and M as far as the model has them, dofs.csv, nodes.csv, and expected.json with what is "
      "known\n"
      "of the model and why.\n\n"
      "Example:\n"
      "  stanchion specimen plate --unknowns 20000 --out plate20k");
}

Status SpecimenCommand::check() const {
  if (!given_.name) {
    return Status::bad_usage("missing-argument", "no model was named", "command line",
                             "see stanchion specimen --list");
  }
  if (!given_.unknowns || !given_.out) {
    return Status::bad_usage(
        "missing-argument", "a model needs --unknowns and --out", "command line",
        fmt::format("write stanchion specimen {} --unknowns 10000 --out DIR", *given_.name));
  }
  return {};
}

Result<int> SpecimenCommand::run(const Call&) {
  if (given_.list) {
    if (Status status = print_result(list_of_models()); !status.ok()) return status;
    return 0;
  }
  if (Status status = check(); !status.ok()) return status;
  const auto options = build_options(given_);
  if (!options.ok()) return options.status();
  const std::string extension = given_.format.value_or("mtx");
  if (Status status = check_output_name("K." + extension); !status.ok()) return status;
  const auto specimen = make_specimen(*given_.name, *given_.unknowns, *options);
  if (!specimen.ok()) return specimen.status();
  if (Status status = make_folder(*given_.out); !status.ok()) return status;
  SpecimenWriter writer(*given_.out, extension);
  if (Status status = writer.write(*specimen); !status.ok()) return status;
  if (given_.quiet) return 0;
  if (Status status = print_result(description(*specimen, *given_.out, writer.names())); !status.ok())
    return status;
  return 0;
}

}  // namespace

std::unique_ptr<Command> make_specimen_command() {
  return std::make_unique<SpecimenCommand>();
}

}  // namespace stanchion::cli
