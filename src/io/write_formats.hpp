// The writers behind write_matrix: one function a format.
#pragma once

#include <string>

#include "base/buffer.hpp"
#include "io/output_file.hpp"
#include "sparse/symmetric_matrix.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

void write_matrix_market(const SymmetricMatrix& matrix, OutputFile& file);
void write_triplet_text(const SymmetricMatrix& matrix, char separator, OutputFile& file);
void write_rutherford_boeing(const SymmetricMatrix& matrix, OutputFile& file);
void write_npz(const SymmetricMatrix& matrix, OutputFile& file);
Status write_hdf5(const SymmetricMatrix& matrix, const std::string& path);

/// Both triangles in compressed rows (or columns, which is the same), indices ascending.
struct WholeMatrix {
  Buffer<Offset> start;
  Buffer<Index> index;
  Buffer<double> value;
};
WholeMatrix expand(const SymmetricMatrix& matrix);

}  // namespace stanchion
