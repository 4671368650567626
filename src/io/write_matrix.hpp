// A symmetric matrix to a file, in the format its name asks for.
#pragma once

#include <string>

#include "sparse/symmetric_matrix.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// Writes `matrix` by the extension of `path`:
/// .mtx, .mtx.gz   Matrix Market, coordinate real symmetric, lower triangle;
/// .npz            SciPy sparse csr archive of the whole matrix (scipy.sparse.load_npz);
/// .h5, .hdf5      group /matrix with data, indices, indptr, shape of the whole matrix, as csr;
/// .rb             Rutherford-Boeing rsa, lower triangle by columns, 17 significant digits;
/// .csv, .tsv, .txt (also .gz)  triplets row, column, value of the lower triangle from 1, with a header line.
/// Every double reads back as the same bits. The file appears whole or not at all.
/// Errors: kBadUsage "unknown-extension", "cannot-write"; kResourceLimit "write-failed", "out-of-memory".
Status write_matrix(const SymmetricMatrix& matrix, const std::string& path);

/// "unknown-extension" when write_matrix could not write to `path`: to be asked before long work starts.
Status check_output_name(const std::string& path);

}  // namespace stanchion
