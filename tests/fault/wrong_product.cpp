#include "fault/wrong_product.hpp"

#include <algorithm>
#include <bit>
#include <cstddef>

#include "base/counter_random.hpp"

namespace stanchion::test {
namespace {

struct Spoiler {
  Wrong wrong = Wrong::kNothing;
  std::int64_t call = 0, calls = 0;
  std::uint64_t seed = 0;
  bool always = false;
};
Spoiler spoiler;  // NOLINT: the interface of the BLAS leaves no other way in

struct Product {
  bool transposed_a, transposed_b;  // column-major: c = alpha op(a) op(b) + beta c
  int m, n, k, lda, ldb, ldc;
  double alpha;
  const double *a, *b;
  double beta;
  double* c;

  double term(std::size_t i, std::size_t j, std::size_t l) const {
    const auto la = static_cast<std::size_t>(lda), lb = static_cast<std::size_t>(ldb);
    return alpha * a[transposed_a ? l + i * la : i + l * la] * b[transposed_b ? j + l * lb : l + j * lb];
  }
};

/// The right product, one term after the other.
void multiply(const Product& p) {
  for (std::size_t j = 0; j < static_cast<std::size_t>(p.n); ++j) {
    double* column = p.c + j * static_cast<std::size_t>(p.ldc);
    for (std::size_t i = 0; i < static_cast<std::size_t>(p.m); ++i) {
      double sum = p.beta == 0 ? 0 : p.beta * column[i];
      for (std::size_t l = 0; l < static_cast<std::size_t>(p.k); ++l) sum += p.term(i, j, l);
      column[i] = sum;
    }
  }
}

/// A number below `bound` from the seed and a counter.
std::size_t draw(std::uint64_t seed, std::uint64_t counter, int bound) {
  return static_cast<std::size_t>(CounterRandom(seed).bits(counter) % static_cast<std::uint64_t>(bound));
}

/// Whether this call is the one to spoil.
bool is_next() {
  const std::int64_t call = spoiler.calls++;
  return spoiler.wrong != Wrong::kNothing && (call == spoiler.call || spoiler.always);
}

void spoil_entry(double& entry, double term, std::uint64_t seed) {
  switch (spoiler.wrong) {
    case Wrong::kNothing:
      break;
    case Wrong::kDroppedTerm:
      entry -= term;
      break;
    case Wrong::kNudged:
      entry *= 1 + 0x1p-20;
      break;
    case Wrong::kShifted:
      entry += 0x1p-30;
      break;
    case Wrong::kFlippedBit:
      entry = std::bit_cast<double>(std::bit_cast<std::uint64_t>(entry) ^
                                    (std::uint64_t{1} << draw(seed, 3, 64)));
      break;
  }
}

void spoil(const Product& product, std::uint64_t seed) {
  const std::size_t i = draw(seed, 0, product.m), j = draw(seed, 1, product.n);
  spoil_entry(product.c[i + j * static_cast<std::size_t>(product.ldc)],
              product.term(i, j, draw(seed, 2, product.k)), seed);
}

const Kernels* sound = nullptr;  // NOLINT: kernels are plain functions

void spoiled_subtract_product(const double* left, Index left_stride, const double* right, Index right_stride,
                              Index depth, Index rows, Index columns, Index first_row, Index first_column,
                              double* c, Index leading) {
  sound->subtract_product(left, left_stride, right, right_stride, depth, rows, columns, first_row,
                          first_column, c, leading);
  if (depth == 0 || columns <= first_column || !is_next()) return;
  const std::uint64_t seed = spoiler.seed + static_cast<std::uint64_t>(spoiler.calls);
  const auto j = first_column + static_cast<Index>(draw(seed, 1, columns - first_column));
  const Index top = std::max(0, j - first_row);
  if (top >= rows) return;
  const Index i = top + static_cast<Index>(draw(seed, 0, rows - top)),
              p = static_cast<Index>(draw(seed, 2, depth));
  const auto at = [&](const double* packed, Index stride, Index strip, Index row) {
    return packed[Offset{row / strip} * stride + Offset{p} * strip + row % strip];
  };
  const double term =
      at(left, left_stride, sound->row_strip, i) * at(right, right_stride, sound->column_strip, j);
  spoil_entry(c[i + Offset{j} * leading], -term, seed);
}

void spoiled_multiply_by_upper(const double* a, Index leading, Index rows, const double* factor, Index width,
                               double* w, Index stride) {
  sound->multiply_by_upper(a, leading, rows, factor, width, w, stride);
  if (rows == 0 || !is_next()) return;
  const std::uint64_t seed = spoiler.seed + static_cast<std::uint64_t>(spoiler.calls);
  const auto i = static_cast<Index>(draw(seed, 0, rows)), j = static_cast<Index>(draw(seed, 1, width)),
             p = static_cast<Index>(draw(seed, 2, j + 1));
  const Index strip = sound->column_strip;
  const double term = a[i + Offset{p} * leading] *
                      factor[Offset{j / strip} * kTileWidth * strip + Offset{p} * strip + j % strip];
  spoil_entry(w[Offset{i / strip} * stride + Offset{j} * strip + i % strip], term, seed);
}

}  // namespace

const Kernels& spoiled_kernels() {
  static const Kernels spoiled = [] {
    sound = &kernels();
    Kernels set = *sound;
    set.subtract_product = spoiled_subtract_product;
    set.multiply_by_upper = spoiled_multiply_by_upper;
    return set;
  }();
  return spoiled;
}

void spoil_product(Wrong wrong, std::int64_t call, std::uint64_t seed, bool always) {
  spoiler = {wrong, call, 0, seed, always};
}

std::int64_t mend_product() {
  const std::int64_t calls = spoiler.calls;
  spoiler = {};
  return calls;
}

}  // namespace stanchion::test

extern "C" void dgemm_(const char* transa, const char* transb, const int* m, const int* n, const int* k,
                       const double* alpha, const double* a, const int* lda, const double* b, const int* ldb,
                       const double* beta, double* c, const int* ldc);

void dgemm_(const char* transa, const char* transb, const int* m, const int* n, const int* k,
            const double* alpha, const double* a, const int* lda, const double* b, const int* ldb,
            const double* beta, double* c, const int* ldc) {
  using namespace stanchion::test;
  const Product product{*transa == 'T', *transb == 'T', *m, *n, *k, *lda, *ldb, *ldc, *alpha, a, b, *beta, c};
  multiply(product);
  if (!is_next() || *m <= 0 || *n <= 0 || *k <= 0) return;
  spoil(product, spoiler.seed + static_cast<std::uint64_t>(spoiler.calls));
}
