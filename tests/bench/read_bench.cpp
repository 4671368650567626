// How fast matrices are read, and with how much memory.
//   read_bench [rows] [threads] [folder for the files]
// First what preflight takes with a dof map and node table. Then it
// writes an invented banded stiffness matrix in several layouts, reads each back, and prints megabytes per
// second, the peak of anonymous memory while reading, and its ratio to the matrix itself.
#include <sys/stat.h>

#include <atomic>
#include <chrono>
#include <cstdio>
#include <cstdlib>
#include <fstream>
#include <string>
#include <thread>

#include "base/clock.hpp"
#include "io/preflight.hpp"
#include "io/preflight_nodes.hpp"
#include "io/read_matrix.hpp"
#include "io/shortest.hpp"
#include "io/write_matrix.hpp"

namespace {

using namespace stanchion;

double anonymous_megabytes() {
  std::ifstream status("/proc/self/status");
  std::string word;
  while (status >> word) {
    if (word != "RssAnon:") continue;
    double kilobytes = 0;
    status >> kilobytes;
    return kilobytes / 1024;
  }
  return 0;
}

/// Watches the anonymous memory of the process from a thread of its own.
class MemoryWatch {
 public:
  MemoryWatch() : start_(anonymous_megabytes()), thread_([this] { watch(); }) {}
  double stop() {
    done_ = true;
    thread_.join();
    return peak_ - start_;
  }

 private:
  void watch() {
    while (!done_) {
      peak_ = std::max(peak_, anonymous_megabytes());
      std::this_thread::sleep_for(std::chrono::milliseconds(2));
    }
  }
  double start_, peak_ = 0;
  std::atomic<bool> done_{false};
  std::thread thread_;
};

/// Lower triangle with about 25 entries a column at irregular distances.
SymmetricMatrix invented(Index rows) {
  const Index reach = std::max<Index>(rows / 100, 40);
  std::vector<Index> distance;
  for (Index i = 0; i < 25; ++i) distance.push_back(i < 12 ? i : i * (reach / 30));
  Buffer<Offset> start(Offset{rows} + 1, 0);
  for (Index column = 0; column < rows; ++column) {
    Offset count = 0;
    for (const Index d : distance) count += column + d < rows ? 1 : 0;
    start[Offset{column} + 1] = start[column] + count;
  }
  SymmetricMatrix matrix{rows, std::move(start), {}, {}};
  matrix.row = Buffer<Index>(matrix.column_start[rows]);
  matrix.value = Buffer<double>(matrix.column_start[rows]);
  for (Index column = 0; column < rows; ++column) {
    Offset at = matrix.column_start[column];
    for (const Index d : distance) {
      if (column + d >= rows) continue;
      matrix.row[at] = column + d;
      matrix.value[at++] = d == 0 ? 2.1e11 / 3.7 : -1e9 / (1.0 + d + column % 97 / 7.0);
    }
  }
  return matrix;
}

/// Both triangles by rows, as a general file.
void write_general(const SymmetricMatrix& matrix, const std::string& path) {
  std::ofstream file(path);
  file << "%%MatrixMarket matrix coordinate real general\n"
       << matrix.rows << ' ' << matrix.rows << ' ' << 2 * matrix.entries() - matrix.rows << '\n';
  std::string text;
  const auto write = [&](Index row, Index column, double value) {
    append_integer(text, row + 1);
    text += ' ';
    append_integer(text, column + 1);
    text += ' ';
    append_number(text, value);
    text += '\n';
  };
  for (Index column = 0; column < matrix.rows; ++column) {
    text.clear();
    for (Offset k = matrix.column_start[column]; k < matrix.column_start[Offset{column} + 1]; ++k) {
      write(matrix.row[k], column, matrix.value[k]);
      if (matrix.row[k] != column) write(column, matrix.row[k], matrix.value[k]);
    }
    file << text;
  }
}

void measure(const std::string& path, ThreadPool& pool) {
  struct stat facts {};
  ::stat(path.c_str(), &facts);
  const double megabytes = static_cast<double>(facts.st_size) / 1e6;
  for (int repeat = 0; repeat < 2; ++repeat) {
    MemoryWatch watch;
    const Stopwatch clock;
    auto file = read_matrix(path, {}, pool);
    const double seconds = clock.seconds();
    const double peak = watch.stop();
    if (!file.ok()) {
      std::printf("%s\n", file.status().to_string().c_str());
      return;
    }
    const double own =
        (12.0 * static_cast<double>(file->matrix.entries()) + 8.0 * file->matrix.rows) / (1 << 20);
    const Stopwatch inspection;
    const bool inspected = preflight({file->matrix, path}).ok();
    std::printf("%-12s %8.1f MB  %6.3f s  %7.1f MB/s  peak %7.1f MiB = %.2f x matrix  preflight %.3f s%s\n",
                path.substr(path.rfind('.')).c_str(), megabytes, seconds, megabytes / seconds, peak,
                peak / own, inspection.seconds(), inspected ? "" : " failed");
  }
}

/// Everything that is looked at before factoring where nodes are known: three displacements a node, on a
/// grid.
void measure_preflight(const SymmetricMatrix& matrix) {
  DofMap dofs;
  NodeTable nodes;
  const char* const names[] = {"ux", "uy", "uz"};
  for (Index row = 0; row < matrix.rows; ++row) {
    const NodeNumber node = row / 3 + 1;
    dofs.append(node, names[row % 3]);
    if (row % 3 == 0)
      nodes.append(node, {double(node % 100), double(node / 100 % 100), double(node / 10000)});
  }
  for (int repeat = 0; repeat < 3; ++repeat) {
    const Stopwatch clock;
    const bool inspected = preflight({matrix, "K", MatrixRole::kStiffness, &dofs, nullptr, nullptr}).ok();
    const double entries = clock.seconds();
    const Warnings of_nodes = inspect_nodes(matrix, dofs, {}, nodes, "nodes.csv");
    const Warnings of_dofs = inspect_partners(dofs, "dofs.csv");
    std::printf("preflight with dof map and nodes: %.3f s, of which entries %.3f s; %zu findings%s\n",
                clock.seconds(), entries, of_nodes.size() + of_dofs.size(), inspected ? "" : " failed");
  }
}

}  // namespace

int main(int count, char** arguments) {
  const Index rows = count > 1 ? std::atoi(arguments[1]) : 1000000;
  ThreadPool pool(count > 2 ? std::atoi(arguments[2]) : available_processors());
  const std::string folder = count > 3 ? arguments[3] : "/tmp";
  const SymmetricMatrix matrix = invented(rows);
  std::printf("%d rows, %lld entries, %d threads\n", matrix.rows, static_cast<long long>(matrix.entries()),
              pool.size());
  measure_preflight(matrix);
  for (const char* name :
       {"/read_bench.mtx", "/read_bench.csv", "/read_bench.rb", "/read_bench.npz", "/read_bench.h5"}) {
    const std::string path = folder + name;
    if (Status status = write_matrix(matrix, path); !status.ok()) {
      std::printf("%s\n", status.to_string().c_str());
      continue;
    }
    measure(path, pool);
    std::remove(path.c_str());
  }
  const std::string general = folder + "/read_bench.general";
  write_general(matrix, general);
  measure(general, pool);
  std::remove(general.c_str());
  return 0;
}
