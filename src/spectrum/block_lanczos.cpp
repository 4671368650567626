#include "spectrum/block_lanczos.hpp"

#include <algorithm>
#include <cmath>
#include <tuple>

#include "base/counter_random.hpp"
#include "dense/blas.hpp"
#include "dense/symmetric_eigen.hpp"

namespace stanchion {
namespace {

/// Up to so many rows the whole space is taken; and up to so many where the basis may take half of them, or
/// where steps have missed something: one eigenvalue problem of that size then takes less time.
constexpr Index kDense = 320, kDenseForMany = 1024;
constexpr Offset kPieces =
    16;  ///< of the rows, each with sums of its own: the same for any number of threads

constexpr Offset kRows = 64;     ///< of the basis at a time, as many as the kernels take
constexpr Index kColumns = 256;  ///< of the basis at a time: their sums stay in the nearest cache

std::size_t at(Offset i) {
  return static_cast<std::size_t>(i);
}

/// Upper triangular R with R^T R = gram (8 x 8); columns that depend on earlier ones, up to rounding, get a
/// zero pivot.
std::vector<double> cholesky(std::vector<double> gram) {
  constexpr Index kV = kBlockVectors;
  std::vector<double> r(kV * kV, 0.0);
  for (Index j = 0; j < kV; ++j) {
    double pivot = gram[at(j * kV + j)];
    const double whole = pivot;
    for (Index k = 0; k < j; ++k) pivot -= r[at(j * kV + k)] * r[at(j * kV + k)];
    if (!(pivot > 1e-12 * whole) || !(whole > 0)) continue;
    const double root = std::sqrt(pivot);
    r[at(j * kV + j)] = root;
    for (Index i = j + 1; i < kV; ++i) {
      double sum = gram[at(i * kV + j)];
      for (Index k = 0; k < j; ++k) sum -= r[at(j * kV + k)] * r[at(i * kV + k)];
      r[at(i * kV + j)] = sum / root;
    }
  }
  return r;
}

/// Entry (row k, column j) of R^-1 at k * 8 + j; rows and columns without a pivot are zero.
std::vector<double> inverse_of(const std::vector<double>& r) {
  constexpr Index kV = kBlockVectors;
  std::vector<double> inverse(kV * kV, 0.0);
  for (Index j = 0; j < kV; ++j) {
    if (r[at(j * kV + j)] == 0) continue;
    inverse[at(j * kV + j)] = 1 / r[at(j * kV + j)];
    for (Index k = j - 1; k >= 0; --k) {
      if (r[at(k * kV + k)] == 0) continue;
      double sum = 0;
      for (Index l = k + 1; l <= j; ++l) sum += r[at(l * kV + k)] * inverse[at(l * kV + j)];
      inverse[at(k * kV + j)] = -sum / r[at(k * kV + k)];
    }
  }
  return inverse;
}

}  // namespace

BlockLanczos::BlockLanczos(Operator apply, Index rows, Index most_columns, std::uint64_t seed,
                           ThreadPool& pool)
    : apply_(std::move(apply)),
      rows_(rows),
      most_columns_(most_columns),
      seed_(seed),
      pool_(pool),
      basis_(Offset{rows} * most_columns),
      projected_(at(Offset{most_columns} * most_columns), 0.0),
      next_(at(Offset{rows} * kV)),
      image_(at(Offset{rows} * kV)),
      coupling_(kV * kV, 0.0) {
  use_single_threaded_blas(pool.size());
  if (rows <= kDense || (rows <= kDenseForMany && 2 * most_columns >= rows)) {
    take_whole_space();
    return;
  }
  draw(next_.data());
  orthonormalise(next_.data(), nullptr);
}

/// Small: the basis is the unit vectors, and the projected operator the operator itself.
void BlockLanczos::take_whole_space() {
  most_columns_ = columns_ = rows_;
  exhausted_ = whole_ = true;
  ritz_.clear();
  basis_ = Buffer<double>(Offset{rows_} * rows_, 0.0);
  projected_.assign(at(Offset{rows_} * rows_), 0.0);
  for (Index first = 0; first < rows_; first += kV) {
    const Index count = std::min<Index>(kV, rows_ - first);
    std::vector<double> block(at(Offset{rows_} * kV), 0.0);
    for (Index v = 0; v < count; ++v) {
      basis_[Offset{first + v} * rows_ + first + v] = 1;
      block[at(Offset{first + v} * kV + v)] = 1;
    }
    apply_(block.data());
    for (Index i = 0; i < rows_; ++i) {
      for (Index v = 0; v < count; ++v)
        projected_[at(Offset{first + v} * rows_ + i)] = block[at(Offset{i} * kV + v)];
    }
  }
}

void BlockLanczos::for_pieces(const std::function<void(Offset, Offset, Offset)>& work) const {
  pool_.run(kPieces, [&](Offset piece, int) {
    const Offset begin = rows_ * piece / kPieces, end = rows_ * (piece + 1) / kPieces;
    if (begin < end) work(begin, end, piece);
  });
}

void BlockLanczos::draw(double* block) {
  const CounterRandom random(seed_, ++drawn_);
  for_pieces([&](Offset begin, Offset end, Offset) {
    for (Offset k = begin * kV; k < end * kV; k += 2) {
      std::tie(block[k], block[k + 1]) = random.gaussians(static_cast<std::uint64_t>(k / 2));
    }
  });
}

/// coefficients := Q^T block over the columns from `first` on, 8 doubles a column, zero before.
void BlockLanczos::project(const double* block, Index first, std::vector<double>& coefficients) const {
  const std::size_t size = at(Offset{columns_} * kV);
  std::vector<double> parts(size * at(kPieces), 0.0);
  for_pieces([&](Offset begin, Offset end, Offset piece) {
    for (Offset row = begin; row < end; row += kRows) {
      const auto rows = static_cast<Index>(std::min(kRows, end - row));
      for (Index c = first; c < columns_; c += kColumns) {
        block_kernels().of_double.times_block(basis_.data() + row * most_columns_ + c, most_columns_,
                                              std::min(kColumns, columns_ - c), rows, block + row * kV,
                                              parts.data() + at(piece) * size + Offset{c} * kV);
      }
    }
  });
  coefficients.assign(size, 0.0);
  for (std::size_t piece = 0; piece < at(kPieces); ++piece) {
    for (std::size_t k = 0; k < size; ++k) coefficients[k] += parts[piece * size + k];
  }
}

/// block := block - Q coefficients, over the columns from `first` on.
void BlockLanczos::take(double* block, const std::vector<double>& coefficients, Index first) const {
  std::vector<double> negative = coefficients;
  for (double& entry : negative) entry = -entry;
  for_pieces([&](Offset begin, Offset end, Offset) {
    for (Offset row = begin; row < end; row += kRows) {
      const auto rows = static_cast<Index>(std::min(kRows, end - row));
      for (Index c = first; c < columns_; c += kColumns) {
        block_kernels().of_double.transposed_times_block(
            basis_.data() + row * most_columns_ + c, most_columns_, std::min(kColumns, columns_ - c), rows,
            negative.data() + Offset{c} * kV, block + row * kV);
      }
    }
  });
}

/// Whether so much of a column was taken away that what is left may not be orthogonal to working accuracy
/// (twice is enough: Kahan; Parlett, 6.9).
bool BlockLanczos::much_was_taken(const double* block, const std::vector<double>& taken) const {
  std::vector<double> parts(at(kPieces) * kV, 0.0);
  for_pieces([&](Offset begin, Offset end, Offset piece) {
    double* own = parts.data() + at(piece) * kV;
    for (Offset i = begin; i < end; ++i) {
      for (Index v = 0; v < kV; ++v) own[v] += block[i * kV + v] * block[i * kV + v];
    }
  });
  for (Index v = 0; v < kV; ++v) {
    double left = 0, gone = 0;
    for (Offset piece = 0; piece < kPieces; ++piece) left += parts[at(piece * kV + v)];
    for (Index k = 0; k < columns_; ++k)
      gone += taken[at(Offset{k} * kV + v)] * taken[at(Offset{k} * kV + v)];
    if (!(gone <= left)) return true;
  }
  return false;
}

/// Makes `block` orthogonal to the basis and adds what is taken to `coefficients` (8 doubles a column). The
/// columns from `recent` on, where most of it lies, come first and by themselves.
void BlockLanczos::orthogonalise(double* block, Index recent, std::vector<double>& coefficients) const {
  coefficients.assign(at(Offset{columns_} * kV), 0.0);
  std::vector<double> taken;
  const auto once = [&](Index first) {
    project(block, first, taken);
    take(block, taken, first);
    for (std::size_t k = 0; k < taken.size(); ++k) coefficients[k] += taken[k];
  };
  if (columns_ == 0) return;
  if (recent > 0) once(recent);
  once(0);
  if (much_was_taken(block, taken)) once(0);
}

/// Makes the columns of `block`, orthogonal to the basis already, orthonormal. Columns that vanish are
/// replaced by random ones, orthogonal to everything; `triangle` (8 x 8, R of the factorization) has zeros
/// there. Two rounds of Cholesky QR.
void BlockLanczos::orthonormalise(double* block, std::vector<double>* triangle) {
  std::vector<double> total(kV * kV, 0.0);
  for (Index k = 0; k < kV; ++k) total[at(k * kV + k)] = 1;
  bool replaced = false;
  int draws = 0;
  for (int round = 0; round < 3; ++round) {
    std::vector<double> parts(at(kPieces) * kV * kV, 0.0);
    for_pieces([&](Offset begin, Offset end, Offset piece) {
      gemm_nt(kV, kV, static_cast<Index>(end - begin), 1, block + begin * kV, kV, block + begin * kV, kV, 0,
              parts.data() + at(piece) * kV * kV, kV);
    });
    std::vector<double> gram(kV * kV, 0.0);
    for (std::size_t piece = 0; piece < at(kPieces); ++piece) {
      for (std::size_t k = 0; k < kV * kV; ++k) gram[k] += parts[piece * kV * kV + k];
    }
    const std::vector<double> r = cholesky(gram);
    // block := block R^-1, columns without a pivot zero; the second round mends what the inverse loses.
    const std::vector<double> inverse = inverse_of(r);
    for_pieces([&](Offset begin, Offset end, Offset) {
      for (Offset row = begin; row < end; row += kRows) {
        const auto rows = static_cast<Index>(std::min(kRows, end - row));
        double sums[kRows * kV] = {};
        block_kernels().of_double.transposed_times_block(block + row * kV, kV, kV, rows, inverse.data(),
                                                         sums);
        std::copy_n(sums, rows * kV, block + row * kV);
      }
    });
    if (!replaced) {
      // total := R total, both upper triangular; entry (row k, column j) at j * kV + k.
      std::vector<double> product(kV * kV, 0.0);
      for (Index j = 0; j < kV; ++j) {
        for (Index k = 0; k <= j; ++k) {
          for (Index l = k; l <= j; ++l) product[at(j * kV + k)] += r[at(l * kV + k)] * total[at(j * kV + l)];
        }
      }
      total = std::move(product);
    }
    Index missing = 0;
    for (Index j = 0; j < kV; ++j) missing += r[at(j * kV + j)] == 0;
    if (missing == 0 && round > 0) break;
    if (missing == 0 || rows_ < columns_ + kV + kV || ++draws > 4) continue;
    std::vector<double> fresh(at(Offset{rows_} * kV)), coefficients;
    draw(fresh.data());
    orthogonalise(fresh.data(), 0, coefficients);
    for (Index i = 0; i < rows_; ++i) {
      for (Index j = 0; j < kV; ++j) {
        if (r[at(j * kV + j)] == 0) block[Offset{i} * kV + j] = fresh[at(Offset{i} * kV + j)];
      }
    }
    replaced = true;
    round = 0;
  }
  if (triangle != nullptr) *triangle = total;
}

void BlockLanczos::append(const double* block) {
  for_pieces([&](Offset begin, Offset end, Offset) {
    for (Offset i = begin; i < end; ++i) {
      std::copy(block + i * kV, block + (i + 1) * kV, basis_.data() + i * most_columns_ + columns_);
    }
  });
  columns_ += kV;
}

bool BlockLanczos::step(const KeptValues& keep) {
  if (exhausted_ || columns_ + 3 * kV > rows_) {
    exhausted_ = true;
    return false;
  }
  if (columns_ + kV > most_columns_) restart(keep);
  append(next_.data());
  std::vector<double>& block = image_;
  for_pieces([&](Offset begin, Offset end, Offset) {
    std::copy(next_.begin() + begin * kV, next_.begin() + end * kV, block.begin() + begin * kV);
  });
  apply_(block.data());
  ++steps_;
  std::vector<double> coefficients;
  orthogonalise(block.data(), std::max(columns_ - 2 * kV, 0), coefficients);
  for (Index v = 0; v < kV; ++v) {
    const Index column = columns_ - kV + v;
    for (Index i = 0; i < columns_; ++i) {
      const double entry = coefficients[at(Offset{i} * kV + v)];
      projected_[at(Offset{column} * most_columns_ + i)] = entry;
      projected_[at(Offset{i} * most_columns_ + column)] = entry;
    }
  }
  orthonormalise(block.data(), &coupling_);
  std::swap(next_, block);
  return true;
}

void BlockLanczos::inject() {
  if (rows_ <= kDenseForMany) {
    take_whole_space();
    return;
  }
  std::vector<double> coefficients;
  draw(next_.data());
  orthogonalise(next_.data(), 0, coefficients);
  orthonormalise(next_.data(), nullptr);
}

const std::vector<RitzValue>& BlockLanczos::ritz_values() {
  if (whole_ && !ritz_.empty()) return ritz_;
  const Index m = columns_;
  rotation_.resize(at(Offset{m} * m));
  for (Index j = 0; j < m; ++j) {
    for (Index i = 0; i < m; ++i) {
      // The two halves differ by rounding.
      rotation_[at(Offset{j} * m + i)] = 0.5 * (projected_[at(Offset{j} * most_columns_ + i)] +
                                                projected_[at(Offset{i} * most_columns_ + j)]);
    }
  }
  std::vector<double> values(at(m));
  ritz_.clear();
  if (!symmetric_eigen(m, rotation_, values)) return ritz_;
  for (Index j = 0; j < m; ++j) {
    double sum = 0;
    const double* last = whole_ ? nullptr : rotation_.data() + Offset{j} * m + (m - kV);
    for (Index k = 0; last != nullptr && k < kV; ++k) {
      double entry = 0;
      for (Index l = k; l < kV; ++l) entry += coupling_[at(l * kV + k)] * last[l];
      sum += entry * entry;
    }
    ritz_.push_back({values[at(j)], std::sqrt(sum), j});
  }
  std::stable_sort(ritz_.begin(), ritz_.end(), [](const RitzValue& a, const RitzValue& b) {
    return std::fabs(a.value) > std::fabs(b.value);
  });
  return ritz_;
}

void BlockLanczos::vectors(const std::vector<RitzValue>& chosen, std::vector<double>& block) const {
  const auto m = columns_;
  std::vector<double> coefficients(at(Offset{m} * kV), 0.0);
  for (std::size_t v = 0; v < chosen.size() && v < at(kV); ++v) {
    std::copy(rotation_.begin() + Offset{chosen[v].column} * m,
              rotation_.begin() + Offset{chosen[v].column + 1} * m,
              coefficients.begin() + static_cast<Offset>(v) * m);
  }
  block.resize(at(Offset{rows_} * kV));
  for_pieces([&](Offset begin, Offset end, Offset) {
    gemm_tn(kV, static_cast<Index>(end - begin), m, 1, coefficients.data(), m,
            basis_.data() + begin * most_columns_, most_columns_, 0, block.data() + begin * kV, kV);
  });
}

/// The basis becomes its `keep` best approximations, in place; what couples them to the next block is found
/// when the operator is applied to that.
void BlockLanczos::restart(const KeptValues& kept) {
  std::vector<RitzValue> ritz;
  KeptValues left = kept;
  for (const RitzValue& value : ritz_values()) {
    Index& room = value.value > 0 ? left.positive : left.negative;
    if (room <= 0 || static_cast<Index>(ritz.size()) >= most_columns_ - 2 * kV) continue;
    --room;
    ritz.push_back(value);
  }
  const auto keep = static_cast<Index>(ritz.size());
  const auto m = columns_;
  std::vector<double> chosen(at(Offset{m} * keep));
  for (Index c = 0; c < keep; ++c) {
    const auto from = rotation_.begin() + Offset{ritz[at(c)].column} * m;
    std::copy(from, from + m, chosen.begin() + Offset{c} * m);
  }
  for_pieces([&](Offset begin, Offset end, Offset) {
    constexpr Offset kTogether = 256;
    std::vector<double> part(at(kTogether * keep));
    for (Offset first = begin; first < end; first += kTogether) {
      const Offset last = std::min(first + kTogether, end);
      gemm_tn(keep, static_cast<Index>(last - first), m, 1, chosen.data(), m,
              basis_.data() + first * most_columns_, most_columns_, 0, part.data(), keep);
      for (Offset i = first; i < last; ++i) {
        std::copy(part.begin() + (i - first) * keep, part.begin() + (i - first + 1) * keep,
                  basis_.data() + i * most_columns_);
      }
    }
  });
  std::fill(projected_.begin(), projected_.end(), 0.0);
  for (Index c = 0; c < keep; ++c) projected_[at(Offset{c} * most_columns_ + c)] = ritz[at(c)].value;
  columns_ = keep;
}

}  // namespace stanchion
