// Dense products of the BLAS at the shapes in use: exactly on whole numbers, within the bound on random ones.
#include <cmath>
#include <limits>

#include "dense/blas.hpp"
#include "dense/selftest_parts.hpp"

namespace stanchion::selftests {
namespace {

enum class Form { kNt, kNn, kTn };

struct Shape {
  Form form;
  Index m, n, k;
  double alpha, beta;
  Index padding;  ///< rows of every leading dimension that do not belong to the matrix

  std::string describe() const {
    const char* names[] = {"N T", "N N", "T N"};
    return std::string("dgemm ") + names[static_cast<int>(form)] + ", " + std::to_string(m) + " x " +
           std::to_string(n) + " x " + std::to_string(k) + ", alpha " + (alpha < 0 ? "-1" : "1") + ", beta " +
           (beta == 0 ? "0" : "1") + ", leading dimensions " + std::to_string(padding) + " larger";
  }
};

/// Operands and result of one product; A(i, l) and B(l, j) are entries of op(A) and op(B).
struct Product {
  Shape shape;
  Index lda, ldb, ldc;
  std::vector<double> a, b, c, before;

  template <class Draw>
  Product(const Shape& given, const Draw& draw) : shape(given) {
    const bool transposed_a = shape.form == Form::kTn, transposed_b = shape.form == Form::kNt;
    lda = (transposed_a ? shape.k : shape.m) + shape.padding;
    ldb = (transposed_b ? shape.n : shape.k) + shape.padding;
    ldc = shape.m + shape.padding;
    a = draw(Offset{lda} * (transposed_a ? shape.m : shape.k));
    b = draw(Offset{ldb} * (transposed_b ? shape.k : shape.n));
    before = draw(Offset{ldc} * shape.n);
    c = before;
    // With beta = 0 the result is written without being read.
    if (shape.beta == 0) {
      for (Offset j = 0; j < shape.n; ++j) {
        for (Offset i = 0; i < shape.m; ++i) c[at(i, j, ldc)] = std::numeric_limits<double>::quiet_NaN();
      }
    }
  }
  static std::size_t at(Offset i, Offset j, Index leading) {
    return static_cast<std::size_t>(j * leading + i);
  }
  double left(Offset i, Offset l) const {
    return shape.form == Form::kTn ? a[at(l, i, lda)] : a[at(i, l, lda)];
  }
  double right(Offset l, Offset j) const {
    return shape.form == Form::kNt ? b[at(j, l, ldb)] : b[at(l, j, ldb)];
  }

  void multiply() {
    const auto gemm = shape.form == Form::kNt ? gemm_nt : (shape.form == Form::kNn ? gemm_nn : gemm_tn);
    gemm(shape.m, shape.n, shape.k, shape.alpha, a.data(), lda, b.data(), ldb, shape.beta, c.data(), ldc);
  }
  bool padding_untouched() const {
    for (Offset j = 0; j < shape.n; ++j) {
      for (Offset i = shape.m; i < ldc; ++i) {
        if (c[at(i, j, ldc)] != before[at(i, j, ldc)]) return false;
      }
    }
    return true;
  }
};

std::string exact_product(const Shape& shape, Numbers& numbers) {
  Product product(shape, [&](Offset count) { return numbers.wholes(count, 8); });
  product.multiply();
  if (!product.padding_untouched()) return shape.describe() + " wrote outside its result";
  std::vector<std::int32_t> left(static_cast<std::size_t>(Offset{shape.m} * shape.k));
  for (Index l = 0; l < shape.k; ++l) {
    for (Index i = 0; i < shape.m; ++i)
      left[Product::at(i, l, shape.m)] = static_cast<std::int32_t>(product.left(i, l));
  }
  std::vector<std::int32_t> column(static_cast<std::size_t>(shape.m));
  for (Index j = 0; j < shape.n; ++j) {
    for (Index i = 0; i < shape.m; ++i) {
      column[static_cast<std::size_t>(i)] =
          shape.beta == 0 ? 0 : static_cast<std::int32_t>(product.before[Product::at(i, j, product.ldc)]);
    }
    for (Index l = 0; l < shape.k; ++l) {
      const auto factor = static_cast<std::int32_t>(shape.alpha * product.right(l, j));
      const std::int32_t* source = left.data() + Product::at(0, l, shape.m);
      for (Index i = 0; i < shape.m; ++i) column[static_cast<std::size_t>(i)] += factor * source[i];
    }
    for (Index i = 0; i < shape.m; ++i) {
      const double found = product.c[Product::at(i, j, product.ldc)];
      if (found != column[static_cast<std::size_t>(i)]) {
        return shape.describe() + " gave " + std::to_string(found) + " where " +
               std::to_string(column[static_cast<std::size_t>(i)]) + " is exact";
      }
    }
  }
  return {};
}

/// |c - exact| <= gamma_(k+1) (|c0| + |A||B|), the exact value by a compensated sum (Ogita, Rump, Oishi, SIAM
/// J. Sci. Comput. 26 (2005), Dot2), which is itself off by at most u |exact| + gamma_k^2 times the sizes.
std::string rounded_product(const Shape& shape, Numbers& numbers) {
  Product product(shape, [&](Offset count) {
    std::vector<double> values(static_cast<std::size_t>(count));
    for (double& v : values) v = numbers.uniform();
    return values;
  });
  product.multiply();
  for (Index j = 0; j < shape.n; ++j) {
    for (Index i = 0; i < shape.m; ++i) {
      double sum = shape.beta == 0 ? 0 : product.before[Product::at(i, j, product.ldc)], rest = 0,
             size = std::fabs(sum);
      for (Index l = 0; l < shape.k; ++l) {
        const double x = shape.alpha * product.left(i, l), y = product.right(l, j), p = x * y, s = sum + p,
                     t = s - sum;
        rest += std::fma(x, y, -p) + ((sum - (s - t)) + (p - t));
        sum = s;
        size += std::fabs(p);
      }
      const double found = product.c[Product::at(i, j, product.ldc)];
      if (!(std::fabs(found - (sum + rest)) <= (shape.k + 4) * 0x1p-53 * size)) {
        return shape.describe() + " of random numbers is off by more than its bound";
      }
    }
  }
  return {};
}

constexpr Form kForms[] = {Form::kNt, Form::kNn, Form::kTn};

/// Shapes of fronts: slivers, tiles, pieces of a panel. `step` thins out the small ones.
std::vector<Shape> shapes(SelftestLevel level) {
  std::vector<Shape> list;
  const bool full = level == SelftestLevel::kFull;
  for (Index size = 1; size <= 80; size += full ? 1 : 3) {
    for (const Form form : kForms) {
      const Index m = size, n = size * 7 % 80 + 1, k = size * 13 % 80 + 1;
      const double sign = size % 2 == 0 ? -1 : 1, keep = size % 3 == 0 ? 0 : 1;
      list.push_back({form, m, n, k, sign, keep, size % 4});
      if (full) list.push_back({form, n, k, m, -sign, 1 - keep, 1});
      if (full) list.push_back({form, k, 1 + size % 8, n, -1, 1, 3});
    }
  }
  list.push_back({Form::kNt, 256, 64, 64, 1, 0, 3});
  list.push_back({Form::kNt, 64, 192, 64, -1, 1, 8});
  if (!full) return list;
  for (const Form form : kForms) {
    for (const double alpha : {-1.0, 1.0}) {
      for (const double beta : {0.0, 1.0}) list.push_back({form, 64, 192, 64, alpha, beta, 5});
    }
    list.push_back({form, 512, 256, 256, -1, 1, 8});
    list.push_back({form, 511, 255, 253, -1, 1, 7});
    list.push_back({form, 1000, 8, 256, -1, 1, 1});
  }
  return list;
}

}  // namespace

std::string exact_products(SelftestLevel level) {
  Numbers numbers(1);
  for (const Shape& shape : shapes(level)) {
    if (std::string wrong = exact_product(shape, numbers); !wrong.empty()) return wrong;
  }
  return {};
}

std::string rounded_products(SelftestLevel level) {
  Numbers numbers(2);
  for (const Shape& shape : shapes(level)) {
    const Offset terms = Offset{shape.m} * shape.n * shape.k;
    if (terms > (level == SelftestLevel::kFull ? 800'000 : 40'000)) continue;
    if (std::string wrong = rounded_product(shape, numbers); !wrong.empty()) return wrong;
  }
  return {};
}

}  // namespace stanchion::selftests
