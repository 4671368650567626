#include "fault/wrong_product.hpp"

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

void spoil(const Product& product, std::uint64_t seed) {
  const CounterRandom random(seed);
  const auto below = [&](std::uint64_t counter, int bound) {
    return static_cast<std::size_t>(random.bits(counter) % static_cast<std::uint64_t>(bound));
  };
  const std::size_t i = below(0, product.m), j = below(1, product.n);
  double& entry = product.c[i + j * static_cast<std::size_t>(product.ldc)];
  switch (spoiler.wrong) {
    case Wrong::kNothing:
      break;
    case Wrong::kDroppedTerm:
      entry -= product.term(i, j, below(2, product.k));
      break;
    case Wrong::kNudged:
      entry *= 1 + 0x1p-20;
      break;
    case Wrong::kShifted:
      entry += 0x1p-30;
      break;
    case Wrong::kFlippedBit:
      entry = std::bit_cast<double>(std::bit_cast<std::uint64_t>(entry) ^ (std::uint64_t{1} << below(3, 64)));
      break;
  }
}

}  // namespace

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
  const std::int64_t call = spoiler.calls++;
  if (spoiler.wrong == Wrong::kNothing || (call != spoiler.call && !spoiler.always)) return;
  if (*m <= 0 || *n <= 0 || *k <= 0) return;
  spoil(product, spoiler.seed + static_cast<std::uint64_t>(call));
}
