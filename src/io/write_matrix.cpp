#include "io/write_matrix.hpp"

#include <new>

#include "io/shortest.hpp"
#include "io/write_formats.hpp"

namespace stanchion {
namespace {

enum class OutputFormat { kMatrixMarket, kNpz, kHdf5, kBoeing, kComma, kTab, kBlank, kUnknown };

OutputFormat format_of(const std::string& path) {
  const std::string plain = has_extension(path, ".gz") ? path.substr(0, path.size() - 3) : path;
  const bool compressed = plain.size() != path.size();
  if (has_extension(plain, ".mtx")) return OutputFormat::kMatrixMarket;
  if (has_extension(plain, ".csv")) return OutputFormat::kComma;
  if (has_extension(plain, ".tsv")) return OutputFormat::kTab;
  if (has_extension(plain, ".txt")) return OutputFormat::kBlank;
  if (compressed) return OutputFormat::kUnknown;
  if (has_extension(plain, ".npz")) return OutputFormat::kNpz;
  if (has_extension(plain, ".h5") || has_extension(plain, ".hdf5")) return OutputFormat::kHdf5;
  if (has_extension(plain, ".rb")) return OutputFormat::kBoeing;
  return OutputFormat::kUnknown;
}

}  // namespace

void write_matrix_market(const SymmetricMatrix& matrix, OutputFile& file) {
  file.write("%%MatrixMarket matrix coordinate real symmetric\n" + std::to_string(matrix.rows) + " " +
             std::to_string(matrix.rows) + " " + std::to_string(matrix.entries()) + "\n");
  std::string line;
  for (Index column = 0; column < matrix.rows && file.ok(); ++column) {
    for (Offset k = matrix.column_start[column]; k < matrix.column_start[Offset{column} + 1]; ++k) {
      line.clear();
      append_integer(line, matrix.row[k] + 1);
      line += ' ';
      append_integer(line, column + 1);
      line += ' ';
      append_number(line, matrix.value[k]);
      line += '\n';
      file.write(line);
    }
  }
}

void write_triplet_text(const SymmetricMatrix& matrix, char separator, OutputFile& file) {
  std::string line = std::string("row") + separator + "column" + separator + "value\n";
  const auto write = [&](Index row, Index column, double value) {
    append_integer(line, row + 1);
    line += separator;
    append_integer(line, column + 1);
    line += separator;
    append_number(line, value);
    line += '\n';
    file.write(line);
    line.clear();
  };
  // There is no size line: an explicit zero in the first and last place tells a reader where the numbering
  // starts and how many rows there are.
  const auto absent = [&](Index place) {
    return matrix.column_start[place] == matrix.column_start[Offset{place} + 1];
  };
  const Index last = matrix.rows - 1;
  if (absent(0)) write(0, 0, 0.0);
  for (Index column = 0; column < matrix.rows && file.ok(); ++column) {
    for (Offset k = matrix.column_start[column]; k < matrix.column_start[Offset{column} + 1]; ++k) {
      write(matrix.row[k], column, matrix.value[k]);
    }
  }
  if (last > 0 && absent(last)) write(last, last, 0.0);
}

WholeMatrix expand(const SymmetricMatrix& matrix) {
  const Index rows = matrix.rows;
  WholeMatrix whole{Buffer<Offset>(Offset{rows} + 1, 0), {}, {}};
  for (Index column = 0; column < rows; ++column) {
    for (Offset k = matrix.column_start[column]; k < matrix.column_start[Offset{column} + 1]; ++k) {
      ++whole.start[Offset{column} + 1];
      if (matrix.row[k] != column) ++whole.start[Offset{matrix.row[k]} + 1];
    }
  }
  for (Offset row = 0; row < rows; ++row) whole.start[row + 1] += whole.start[row];
  whole.index = Buffer<Index>(whole.start[rows]);
  whole.value = Buffer<double>(whole.start[rows]);
  Buffer<Offset> next = whole.start.clone();
  // Going by columns, the row r collects its left part in order; then, at column r, the rest follows in
  // order.
  for (Index column = 0; column < rows; ++column) {
    for (Offset k = matrix.column_start[column]; k < matrix.column_start[Offset{column} + 1]; ++k) {
      const Index row = matrix.row[k];
      const Offset here = next[column]++;
      whole.index[here] = row;
      whole.value[here] = matrix.value[k];
      if (row == column) continue;
      const Offset there = next[row]++;
      whole.index[there] = column;
      whole.value[there] = matrix.value[k];
    }
  }
  return whole;
}

Status check_output_name(const std::string& path) {
  if (format_of(path) != OutputFormat::kUnknown) return {};
  return Status::bad_usage("unknown-extension", "the name does not say which format to write", path,
                           "end it with .mtx, .mtx.gz, .npz, .h5, .rb, .csv, .tsv or .txt");
}

Status write_matrix(const SymmetricMatrix& matrix, const std::string& path) try {
  if (Status status = check_output_name(path); !status.ok()) return status;
  const OutputFormat format = format_of(path);
  if (format == OutputFormat::kHdf5) return write_hdf5(matrix, path);
  OutputFile file(path, has_extension(path, ".gz"));
  switch (format) {
    case OutputFormat::kMatrixMarket:
      write_matrix_market(matrix, file);
      break;
    case OutputFormat::kNpz:
      write_npz(matrix, file);
      break;
    case OutputFormat::kBoeing:
      write_rutherford_boeing(matrix, file);
      break;
    default:
      write_triplet_text(matrix,
                         format == OutputFormat::kComma ? ','
                         : format == OutputFormat::kTab ? '\t'
                                                        : ' ',
                         file);
  }
  return file.commit();
} catch (const std::bad_alloc&) {
  return Status::resource_limit("out-of-memory", "no memory left to write the matrix", path,
                                "use a machine with more memory");
}

}  // namespace stanchion
