// Writes a specimen to disk: make_model NAME UNKNOWNS DIRECTORY [FAULT]. For benchmarks; the program's own
// command is `stanchion specimen`, which writes the same bytes.
#include <cstdio>
#include <cstdlib>
#include <string>

#include "base/clock.hpp"
#include "io/write_matrix.hpp"
#include "specimen/specimen.hpp"
#include "specimen/specimen_text.hpp"

namespace {

using stanchion::Status;

Status write_text(const std::string& path, const std::string& text) {
  std::FILE* file = std::fopen(path.c_str(), "wb");
  const bool written = file != nullptr && std::fwrite(text.data(), 1, text.size(), file) == text.size();
  const bool closed = file != nullptr && std::fclose(file) == 0;
  if (written && closed) return {};
  return Status::bad_usage("cannot-write", "cannot write the file", path, "name a directory that exists");
}

Status write_all(const stanchion::Specimen& specimen, const std::string& directory) {
  using namespace stanchion;
  Status status = write_matrix(specimen.stiffness, directory + "K.mtx");
  if (status.ok() && specimen.geometric) status = write_matrix(*specimen.geometric, directory + "G.mtx");
  if (status.ok() && specimen.mass) status = write_matrix(*specimen.mass, directory + "M.mtx");
  if (status.ok()) status = write_text(directory + "dofs.csv", dofs_csv(specimen));
  if (status.ok()) status = write_text(directory + "nodes.csv", nodes_csv(specimen));
  if (status.ok() && !specimen.multipliers.empty()) {
    status = write_text(directory + "multipliers.txt", multipliers_text(specimen));
  }
  if (status.ok()) status = write_text(directory + "expected.json", expected_json(specimen));
  return status;
}

int fail(const Status& status) {
  std::fprintf(stderr, "%s\n", status.to_string().c_str());
  return 2;
}

}  // namespace

int main(int argc, char** argv) {
  if (argc < 4) {
    for (const auto& entry : stanchion::specimen_list()) {
      std::printf("%-8s %s\n         faults: %s\n", entry.name, entry.line, entry.faults);
    }
    std::fprintf(stderr, "usage: make_model NAME UNKNOWNS DIRECTORY [FAULT]\n");
    return 2;
  }
  stanchion::SpecimenOptions options;
  if (argc > 4) {
    const auto fault = stanchion::fault_from(argv[4]);
    if (!fault.ok()) return fail(fault.status());
    options.fault = *fault;
  }
  const stanchion::Stopwatch watch;
  const auto specimen = stanchion::make_specimen(argv[1], std::atoll(argv[2]), options);
  if (!specimen.ok()) return fail(specimen.status());
  const double made = watch.seconds();
  if (const Status status = write_all(*specimen, std::string(argv[3]) + "/"); !status.ok())
    return fail(status);
  std::printf("%s\nrows %d, entries of K %lld, made in %.2f s, written in %.2f s\n",
              specimen->scenario.c_str(), specimen->stiffness.rows,
              static_cast<long long>(specimen->stiffness.entries()), made, watch.seconds() - made);
  return 0;
}
