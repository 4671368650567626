// Writes the matrices of a specimen as Matrix Market files: make_model NAME UNKNOWNS DIRECTORY [fault]
// For benchmarks and for the packaged models; the program's own command is `stanchion specimen`.
#include <charconv>
#include <cstdio>
#include <cstdlib>
#include <memory>
#include <string>

#include "base/clock.hpp"
#include "specimen/specimen.hpp"

namespace {

using stanchion::Index;
using stanchion::Offset;
using stanchion::SymmetricMatrix;

void append(std::string& text, auto value, char end) {
  char digits[32];
  const auto result = std::to_chars(digits, digits + sizeof digits, value);
  text.append(digits, result.ptr);
  text += end;
}

void write(const std::string& path, const SymmetricMatrix& matrix) {
  const std::unique_ptr<std::FILE, int (*)(std::FILE*)> file(std::fopen(path.c_str(), "wb"), std::fclose);
  if (!file) {
    std::fprintf(stderr, "cannot write %s\n", path.c_str());
    std::exit(2);
  }
  std::string text = "%%MatrixMarket matrix coordinate real symmetric\n";
  append(text, matrix.rows, ' ');
  append(text, matrix.rows, ' ');
  append(text, matrix.entries(), '\n');
  for (Index column = 0; column < matrix.rows; ++column) {
    for (Offset k = matrix.column_start[column]; k < matrix.column_start[Offset{column} + 1]; ++k) {
      append(text, matrix.row[k] + 1, ' ');
      append(text, column + 1, ' ');
      append(text, matrix.value[k], '\n');
    }
    if (text.size() > 1U << 20) {
      std::fwrite(text.data(), 1, text.size(), file.get());
      text.clear();
    }
  }
  std::fwrite(text.data(), 1, text.size(), file.get());
}

}  // namespace

int main(int argc, char** argv) {
  if (argc < 4) {
    for (const auto& entry : stanchion::specimen_list()) std::printf("%-8s %s\n", entry.name, entry.line);
    std::fprintf(stderr, "usage: make_model NAME UNKNOWNS DIRECTORY [fault]\n");
    return 2;
  }
  stanchion::SpecimenOptions options;
  if (argc > 4) {
    const auto fault = stanchion::fault_from(argv[4]);
    if (!fault.ok()) {
      std::fprintf(stderr, "%s\n", fault.status().to_string().c_str());
      return 2;
    }
    options.fault = *fault;
  }
  const stanchion::Stopwatch watch;
  const auto specimen = stanchion::make_specimen(argv[1], std::atoll(argv[2]), options);
  if (!specimen.ok()) {
    std::fprintf(stderr, "%s\n", specimen.status().to_string().c_str());
    return 2;
  }
  const double made = watch.seconds();
  const std::string directory = std::string(argv[3]) + "/";
  write(directory + "K.mtx", specimen->stiffness);
  if (specimen->geometric) write(directory + "G.mtx", *specimen->geometric);
  if (specimen->mass) write(directory + "M.mtx", *specimen->mass);
  std::printf("%s\nrows %d, entries of K %lld, made in %.2f s, written in %.2f s\n",
              specimen->scenario.c_str(), specimen->stiffness.rows,
              static_cast<long long>(specimen->stiffness.entries()), made, watch.seconds() - made);
  for (const auto& count : specimen->expected.counts) {
    std::printf("expected below %.17g: %d\n", count.shift, count.below);
  }
  return 0;
}
