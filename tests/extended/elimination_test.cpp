// Single fronts rebuilt from their pivots in 1024-bit arithmetic: every row within the proved bound.
#include <gtest/gtest.h>

#include "extended/eliminate.hpp"
#include "extended/exact.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::Long;
using test::Random;
using test::to_long;

enum class Kind { kRandom, kZeroDiagonal, kDefinite, kGraded, kDelaying, kSingular };

/// Lower triangle (full square storage) of a front of the given kind; the first `candidates` rows may be
/// pivots.
std::vector<double> make_entries(Random& random, Kind kind, Index order, Index candidates) {
  const auto n = static_cast<std::size_t>(order);
  std::vector<double> a(n * n, 0);
  const auto random_entry = [&] { return test::uniform(random, -1, 1); };
  for (std::size_t j = 0; j < n; ++j) {
    for (std::size_t i = j; i < n; ++i) a[i + j * n] = random_entry();
    if (kind == Kind::kZeroDiagonal) a[j + j * n] = 0;
    if (kind == Kind::kDefinite) a[j + j * n] = static_cast<double>(n);
  }
  for (std::size_t j = 0; j < n; ++j) {
    for (std::size_t i = j; i < n; ++i) {
      if (kind == Kind::kGraded) {
        a[i + j * n] *= std::ldexp(1.0, -3 * static_cast<int>((i * 7 % n + j * 7 % n)));
      } else if (kind == Kind::kDelaying && j < static_cast<std::size_t>(candidates)) {
        // Candidates that hardly see one another, and rows below that they see very well.
        if (i < static_cast<std::size_t>(candidates) && j % 3 == 0) a[i + j * n] *= 1e-9;
      } else if (kind == Kind::kSingular && (j % 5 == 2 || i % 5 == 2)) {
        a[i + j * n] = 0;
      }
    }
  }
  return a;
}

void set_entry(double value, Random&, double& to) {
  to = value;
}
void set_entry(double value, Random& random, DoubleDouble& to) {
  to = two_sum(value, value * 0x1p-54 * test::uniform(random, -1, 1));
}

template <class Scalar>
struct Eliminated {
  std::vector<Scalar> given;  ///< full lower triangle as given
  std::vector<double> storage;
  ScalarFront<Scalar> front;
  std::vector<PivotKind> kind;
  std::vector<Scalar> diagonal;
  std::vector<Index> label;
  std::vector<double> row_error, growth, sign, image, image_error;
  ScalarElimination result;

  Eliminated(Random& random, Kind how, Index order, Index candidates, bool definite)
      : given(static_cast<std::size_t>(order) * static_cast<std::size_t>(order)),
        kind(static_cast<std::size_t>(candidates)),
        diagonal(static_cast<std::size_t>(candidates)),
        label(static_cast<std::size_t>(order)),
        row_error(static_cast<std::size_t>(order), 0.0),
        growth(static_cast<std::size_t>(order), 0.0),
        image(static_cast<std::size_t>(order * ScalarTraits<Scalar>::planes), 0.0),
        image_error(static_cast<std::size_t>(order), 0.0) {
    for (Index i = 0; i < order; ++i) sign.push_back(random() % 2 == 0 ? 1 : -1);
    const std::vector<double> entries = make_entries(random, how, order, candidates);
    front.matrix.layout = front_layout(order);
    storage.assign(static_cast<std::size_t>(ScalarBlock<Scalar>::doubles(front.matrix.layout)), 0.0);
    front.matrix.data = storage.data();
    for (Index j = 0; j < order; ++j) {
      label[static_cast<std::size_t>(j)] = j;
      for (Index i = j; i < order; ++i) {
        const auto at =
            static_cast<std::size_t>(i) + static_cast<std::size_t>(j) * static_cast<std::size_t>(order);
        set_entry(entries[at], random, given[at]);
        front.matrix.set(i, j, given[at]);
      }
    }
    front.candidates = candidates;
    front.kind = kind.data();
    front.diagonal = diagonal.data();
    front.label = label.data();
    front.row_error = row_error.data();
    front.growth = growth.data();
    front.sign = sign.data();
    front.image = {image.data(), order};
    front.image_error = image_error.data();
    ScalarScratch scratch;
    result = eliminate_scalar_front(front, ScalarOptions{definite, 0.01, true}, scratch, nullptr);
  }

  Index order() const { return front.matrix.layout.order; }
  PivotKind kind_of(Index k) const { return kind[static_cast<std::size_t>(k)]; }

  Long lower(Index i, Index k) const {
    if (i == k) return 1;
    if (i < k || (i == k + 1 && kind_of(k) == PivotKind::kTwoFirst)) return 0;
    return to_long(front.matrix.get(i, k));
  }

  /// (L D)_ik
  Long scaled(Index i, Index k) const {
    Long sum = lower(i, k) * to_long(front.matrix.get(k, k));
    if (kind_of(k) == PivotKind::kTwoFirst) sum += lower(i, k + 1) * to_long(front.matrix.get(k + 1, k));
    if (kind_of(k) == PivotKind::kTwoSecond) sum += lower(i, k - 1) * to_long(front.matrix.get(k, k - 1));
    return sum;
  }

  /// Given minus L D L^T minus what is left, in rows and columns as permuted.
  Long residual(Index i, Index j, const std::vector<Long>& l, const std::vector<Long>& w) const {
    const Index a = std::max(label[static_cast<std::size_t>(i)], label[static_cast<std::size_t>(j)]);
    const Index b = std::min(label[static_cast<std::size_t>(i)], label[static_cast<std::size_t>(j)]);
    const auto n = static_cast<std::size_t>(order()), p = static_cast<std::size_t>(result.eliminated);
    Long sum = to_long(given[static_cast<std::size_t>(a) + static_cast<std::size_t>(b) * n]);
    for (std::size_t k = 0; k < p; ++k) {
      sum -= w[static_cast<std::size_t>(i) * p + k] * l[static_cast<std::size_t>(j) * p + k];
    }
    if (j >= result.eliminated) sum -= to_long(front.matrix.get(i, j));
    return sum;
  }

  /// Largest ratio of a row's error to its bound.
  double worst_ratio() const {
    const auto n = static_cast<std::size_t>(order());
    const Index p = result.eliminated;
    std::vector<Long> l, w;
    for (Index i = 0; i < order(); ++i) {
      for (Index k = 0; k < p; ++k) {
        l.push_back(lower(i, k));
        w.push_back(scaled(i, k));
      }
    }
    std::vector<Long> error(n, 0), left(n, 0);
    for (Index j = 0; j < order(); ++j) {
      for (Index i = j; i < order(); ++i) {
        const Long e = abs(residual(i, j, l, w));
        const Long s = j >= p ? Long(abs(to_long(front.matrix.get(i, j)))) : Long(0);
        error[static_cast<std::size_t>(i)] += e;
        left[static_cast<std::size_t>(i)] += s;
        if (i == j) continue;
        error[static_cast<std::size_t>(j)] += e;
        left[static_cast<std::size_t>(j)] += s;
      }
    }
    double worst = 0;
    for (std::size_t i = 0; i < n; ++i) {
      const Long bound = growth_factor<Scalar>(p) * Long(growth[i]) + handed_on_factor<Scalar>(p) * left[i];
      if (bound == 0) {
        EXPECT_EQ(error[i], 0) << "row " << i;
      } else {
        worst = std::max(worst, static_cast<double>(error[i] / bound));
      }
    }
    return worst;
  }
};

/// Largest ratio of a row's error in the image L D L^T x to what front_worker.cpp allows it.
template <class Scalar>
double worst_image_ratio(const Eliminated<Scalar>& front) {
  const Index p = front.result.eliminated, order = front.order();
  std::vector<Long> product(static_cast<std::size_t>(order), 0);
  for (Index k = 0; k < p; ++k) {
    Long z = 0;
    for (Index i = 0; i < order; ++i) z += front.lower(i, k) * front.sign[static_cast<std::size_t>(i)];
    for (Index i = 0; i < order; ++i) product[static_cast<std::size_t>(i)] += front.scaled(i, k) * z;
  }
  double worst = 0;
  for (Index k = 0; k < order; ++k) {
    const auto i = static_cast<std::size_t>(k);
    const Long error = abs(product[i] - to_long(load(front.front.image, k)));
    const double bound =
        ScalarTraits<Scalar>::unit * (p * std::fabs(front.image[i]) + (p + order + 8) * front.growth[i]);
    EXPECT_LE(error, Long(bound)) << "row " << k;
    if (bound > 0) worst = std::max(worst, static_cast<double>(error / Long(bound)));
  }
  return worst;
}

template <class Scalar>
class Elimination : public ::testing::Test {};
using Scalars = ::testing::Types<double, DoubleDouble>;
TYPED_TEST_SUITE(Elimination, Scalars, );

TYPED_TEST(Elimination, EveryRowOfEveryKindOfFrontKeepsItsBound) {
  Random random(41);
  double worst = 0, worst_image = 0;
  Offset pairs = 0;
  for (const Kind kind :
       {Kind::kRandom, Kind::kZeroDiagonal, Kind::kGraded, Kind::kDelaying, Kind::kSingular}) {
    for (const auto& [order, candidates] : {std::pair{7, 7}, {30, 12}, {61, 50}, {72, 72}, {90, 40}}) {
      const Eliminated<TypeParam> front(random, kind, order, candidates, false);
      const double ratio = front.worst_ratio();
      EXPECT_LE(ratio, 1.001) << "kind " << static_cast<int>(kind) << " order " << order;
      worst = std::max(worst, ratio);
      worst_image = std::max(worst_image, worst_image_ratio(front));
      pairs += front.result.two_by_two;
      if (order == candidates) {
        EXPECT_EQ(front.result.eliminated, order) << static_cast<int>(kind);
      }
    }
  }
  EXPECT_GE(worst, 0.003) << "a bound this loose is not measured by this test";
  EXPECT_GE(worst_image, 1e-4) << "a bound this loose is not measured by this test";
  EXPECT_GE(pairs, 5);
}

TYPED_TEST(Elimination, DefiniteFrontsKeepTheirBoundWithoutInterchanges) {
  Random random(43);
  for (const auto& [order, candidates] : {std::pair{40, 40}, {75, 33}}) {
    const Eliminated<TypeParam> front(random, Kind::kDefinite, order, candidates, true);
    EXPECT_EQ(front.result.eliminated, candidates);
    EXPECT_TRUE(std::is_sorted(front.label.begin(), front.label.end()));
    EXPECT_LE(front.worst_ratio(), 1.001);
  }
  EXPECT_TRUE(Eliminated<TypeParam>(random, Kind::kRandom, 20, 20, true).result.stopped);
}

TYPED_TEST(Elimination, MultipliersStayBelowTheirLimitAndTheRestWaits) {
  Random random(47);
  const Eliminated<TypeParam> front(random, Kind::kDelaying, 60, 30, false);
  EXPECT_LT(front.result.eliminated, 30);
  EXPECT_GT(front.result.eliminated, 0);
  for (Index k = 0; k < front.result.eliminated; ++k) {
    for (Index i = k + 1; i < 60; ++i) EXPECT_LE(abs(front.lower(i, k)), 100.001);
  }
}

TYPED_TEST(Elimination, ZeroColumnsAreZeroPivots) {
  Random random(53);
  const Eliminated<TypeParam> front(random, Kind::kSingular, 40, 40, false);
  EXPECT_EQ(std::count(front.kind.begin(), front.kind.end(), PivotKind::kZero), 8);
}

}  // namespace
}  // namespace stanchion
