// Certified statements about matrices of 21 to 200 rows held against ball arithmetic, where rationals grow
// too large: signs, the bound of every factorization, bounds on the smallest eigenvalue, and radii free of
// eigenvalues.
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <string>

#include "inertia/certify.hpp"
#include "oracle/ball_inertia.hpp"
#include "specimen/specimen.hpp"
#include "support/dense_reference.hpp"
#include "support/factored.hpp"
#include "support/generators.hpp"

extern "C" void dsygv_(const int* itype, const char* jobz, const char* uplo, const int* n, double* a,
                       const int* lda, double* b, const int* ldb, double* w, double* work, const int* lwork,
                       int* info);

namespace stanchion {
namespace {

using test::ball_inertia;
using test::BallInertia;
using test::Random;

/// The four ways to a certificate: two offsets in double (with and without the definite attempt) and in
/// double-double, the relative test with L in double and in single precision, and whatever certify_inertia
/// chooses.
enum class Way { kOffsets, kDefiniteFirst, kExtended, kRelative, kSingle, kChosen };
constexpr Way kWays[] = {Way::kOffsets,  Way::kDefiniteFirst, Way::kExtended,
                         Way::kRelative, Way::kSingle,        Way::kChosen};
const char* name_of(Way way) {
  constexpr const char* kNames[] = {"offsets", "definite first", "extended", "relative", "single", "chosen"};
  return kNames[static_cast<int>(way)];
}

/// A pencil in elimination order with one analysis and scaling.
struct Case {
  test::Prepared prepared;
  std::vector<double> coefficients;
  Buffer<double> ones;

  ShiftedMatrix matrix() const { return {&prepared.family, coefficients, &prepared.scale, 0}; }
  ShiftedMatrix unscaled() const { return {&prepared.family, coefficients, &ones, 0}; }
  ShiftedMatrix second() const { return {&prepared.family, {0, 1}, &prepared.scale, 0}; }
};

Case make_case(const SymmetricMatrix& matrix) {
  return {test::prepare(matrix), {1}, Buffer<double>(matrix.rows, 1.0)};
}

/// K + factor * second; the entries of either are never added up in double.
Case make_pencil(const SymmetricMatrix& stiffness, const SymmetricMatrix& second) {
  Case made = make_case(stiffness);
  const std::array<const SymmetricMatrix*, 2> members{&stiffness, &second};
  const MatrixFamily family = unite(members);
  const SymmetricMatrix pattern{family.rows, family.column_start.clone(), family.row.clone(),
                                family.values[0].clone()};
  auto analysis = analyse({&pattern, {}, true}, 1);
  EXPECT_TRUE(analysis.ok());
  made.prepared.analysis = std::move(*analysis);
  made.prepared.family = permute(family, made.prepared.analysis.tree.position_of);
  made.coefficients = {1, 0};
  made.prepared.scale = std::move(*power_of_two_scaling(made.prepared.family, made.coefficients));
  return made;
}

CertifiedInertia certify(const Case& subject, Way way, bool with_radius) {
  RiskBudget risk(1e-6);
  CertifyOptions options;
  options.risk = &risk;
  options.most_factor_bytes = Offset{1} << 40;
  options.offsets.definite_first = way == Way::kDefiniteFirst || way == Way::kChosen;
  options.offsets.extended = way == Way::kExtended;
  const ShiftedMatrix matrix = subject.matrix(), second = with_radius ? subject.second() : ShiftedMatrix{};
  const auto& [family, scale, analysis, pool] = subject.prepared;
  if (with_radius) options.second = &second;
  if (way == Way::kChosen) {
    auto found = certify_inertia(analysis, matrix, options, *pool);
    EXPECT_TRUE(found.ok()) << found.status().to_string();
    return found.ok() ? std::move(*found) : CertifiedInertia{};
  }
  if (way != Way::kRelative && way != Way::kSingle) {
    auto found = certify_by_offsets(analysis, matrix, options.offsets, *pool);
    EXPECT_TRUE(found.ok()) << found.status().to_string();
    return found.ok() ? std::move(*found) : CertifiedInertia{};
  }
  CertifiedInertia found;
  found.inertia.undecided = analysis.tree.rows;
  FactorOptions factor_options;
  factor_options.keep_factor = true;
  factor_options.store_single = way == Way::kSingle;
  const auto factorization = factorize(analysis, matrix, factor_options, *pool);
  EXPECT_TRUE(factorization.ok() && check_fault(analysis, *factorization).ok());
  if (!factorization.ok() || factorization->breakdown) return found;
  const auto test = certify_relative(analysis, matrix, *factorization, risk, 11, *pool, options.second);
  EXPECT_TRUE(test.ok());
  if (!test.ok() || !test->certified) return found;
  found.certificate.level = Level::kStatistical;
  found.inertia = {static_cast<Index>(test->negative), 0, static_cast<Index>(test->positive), 0};
  found.exclusion_radius = test->exclusion_radius;
  return found;
}

/// Every factorization of a certificate says: as many eigenvalues as it counts lie below its offset, give or
/// take its error bound.
void expect_true_runs(const Case& subject, const Certificate& certificate) {
  for (const OffsetRun& run : certificate.runs) {
    if (!run.error_bound) continue;
    const double outer[] = {run.offset, *run.error_bound}, inner[] = {run.offset, -*run.error_bound};
    const BallInertia most = ball_inertia(subject.matrix(), outer),
                      least = ball_inertia(subject.matrix(), inner);
    EXPECT_LE(run.negative, most.negative + most.open)
        << "offset " << run.offset << " bound " << *run.error_bound;
    EXPECT_GE(run.negative, least.negative) << "offset " << run.offset << " bound " << *run.error_bound;
  }
}

/// No eigenvalue of the scaled matrix, and of the matrix itself, below what the certificate says.
void expect_true_least(const Case& subject, const Certificate& certificate) {
  if (certificate.smallest_eigenvalue_above) {
    EXPECT_EQ(ball_inertia(subject.matrix(), {{*certificate.smallest_eigenvalue_above}}).negative, 0);
  }
  if (certificate.smallest_eigenvalue_of_k_above) {
    EXPECT_EQ(ball_inertia(subject.unscaled(), {{*certificate.smallest_eigenvalue_of_k_above}}).negative, 0);
  }
}

/// The inertia must be the same at both ends of the interval said to hold no eigenvalue of the pencil.
void expect_true_radius(const Case& subject, const CertifiedInertia& found, const BallInertia& truth) {
  if (found.exclusion_radius == 0) return;
  for (const int side : {-1, 1}) {
    Case moved{{}, subject.coefficients, {}};
    ShiftedMatrix there = subject.matrix();
    there.coefficients[1] += side * found.exclusion_radius * (1 - 0x1p-40);
    const BallInertia at_end = ball_inertia(there);
    EXPECT_EQ(at_end.open, 0);
    EXPECT_EQ(at_end.negative, truth.negative) << "radius " << found.exclusion_radius;
  }
}

struct Tally {
  int cases = 0, left_open = 0;
};

/// Holds what one way certifies against the balls. `known_zero` eigenvalues are zero by construction.
void expect_true(const Case& subject, Way way, const BallInertia& truth, Index known_zero, Tally& tally) {
  SCOPED_TRACE(name_of(way));
  const CertifiedInertia found = certify(subject, way, subject.coefficients.size() == 2);
  ++tally.cases;
  const bool open = found.certificate.level == Level::kNone || found.inertia.zero > known_zero;
  tally.left_open += open;
  if (found.certificate.level == Level::kNone) return;
  const Inertia& inertia = found.inertia;
  EXPECT_EQ(inertia.negative + inertia.zero + inertia.positive, subject.prepared.family.rows);
  const Index hidden = truth.open - known_zero;
  EXPECT_LE(inertia.negative, truth.negative + hidden);
  EXPECT_LE(inertia.positive, truth.positive + hidden);
  expect_true_runs(subject, found.certificate);
  expect_true_least(subject, found.certificate);
  expect_true_radius(subject, found, truth);
}

/// All ways; the balls must tell all but `known_zero` directions, or the test shows nothing.
void expect_true(const Case& subject, Tally (&tally)[std::size(kWays)], Index known_zero = 0) {
  const BallInertia truth = ball_inertia(subject.matrix());
  ASSERT_EQ(truth.open, known_zero) << "the oracle must know";
  for (std::size_t w = 0; w < std::size(kWays); ++w)
    expect_true(subject, kWays[w], truth, known_zero, tally[w]);
}

/// How often a way left open what the balls could tell, for the record.
void record(const std::string& name, const Tally (&tally)[std::size(kWays)]) {
  for (std::size_t w = 0; w < std::size(kWays); ++w) {
    testing::Test::RecordProperty(
        name + "_" + name_of(kWays[w]),
        std::to_string(tally[w].left_open) + " of " + std::to_string(tally[w].cases));
  }
}

/// Springs between points of a random graph that hangs together; every 15th has stiffness `penalty`. One
/// point is held.
SymmetricMatrix spring_net(Random& random, Index n, double penalty, double held) {
  std::vector<Triplet> entries{{0, 0, held}};
  int number = 0;
  const auto join = [&](Index i, Index j) {
    const double k = number++ % 15 == 7 ? penalty : 1 + static_cast<double>(random() % 3);
    entries.insert(entries.end(), {{i, i, k}, {j, j, k}, {std::max(i, j), std::min(i, j), -k}});
  };
  for (Index i = 1; i < n; ++i) join(i, static_cast<Index>(random() % static_cast<std::uint64_t>(i)));
  for (Index more = 0; more < n / 2; ++more) {
    const auto i = static_cast<Index>(random() % static_cast<std::uint64_t>(n));
    if (i > 0) join(i, (i * 7 + 3) % i);
  }
  return from_triplets(n, entries);
}

TEST(Balls, TellSmallMatricesAsEverybodyDoes) {
  // The oracle itself, on spectra known in closed form.
  const auto spectrum = test::laplacian_spectrum(4, 5, 3);
  for (const double shift : {-0.5, 1.0 / 3, 3.1, 20.0}) {
    const Case subject = make_case(test::laplacian(4, 5, 3, shift));
    const BallInertia truth = ball_inertia(subject.matrix());
    EXPECT_EQ(truth.open, 0);
    EXPECT_EQ(truth.negative,
              std::count_if(spectrum.begin(), spectrum.end(), [&](double v) { return v < shift; }));
  }
  // [0 1; 1 0] beside an exact zero: one of either sign, and one that no ball can tell.
  const BallInertia pair = ball_inertia(make_case(from_triplets(3, {{1, 0, 1.0}})).matrix());
  EXPECT_EQ(pair.negative, 1);
  EXPECT_EQ(pair.positive, 1);
  EXPECT_EQ(pair.open, 1);
}

TEST(Balls, PenaltySpringsFrom1e2To1e18) {
  // Beyond 1e15 the sums k + penalty round: the matrix as read may be indefinite or singular in all digits,
  // and only exact arithmetic knows. A common factor 1 + 2^-30 keeps the entries from being whole numbers.
  Random random(101);
  Tally tally[std::size(kWays)], soft[std::size(kWays)];
  for (int power = 2; power <= 18; ++power) {
    SCOPED_TRACE("10^" + std::to_string(power));
    for (const Index n : {30, 90}) {
      const Case subject = make_case(spring_net(random, n, std::pow(10.0, power) * (1 + 0x1p-30), 1));
      const BallInertia truth = ball_inertia(subject.matrix());
      if (truth.open > 0) continue;  // singular as read
      for (std::size_t w = 0; w < std::size(kWays); ++w) {
        expect_true(subject, kWays[w], truth, 0, power <= 10 ? soft[w] : tally[w]);
      }
    }
  }
  record("to_1e10", soft);
  record("from_1e11", tally);
  for (const Tally& of_way : soft) EXPECT_EQ(of_way.left_open, 0) << "clear cases must be answered";
}

TEST(Balls, PascalMatrices) {
  // Binomial coefficients, rounded to double from about 30 rows on: definite with determinant 1 while exact
  // (Higham, Accuracy and Stability, 2nd ed., section 28.4), and anything once rounded.
  Tally tally[std::size(kWays)];
  for (const Index n : {21, 24, 28, 30, 34, 40, 52, 64}) {
    SCOPED_TRACE(n);
    std::vector<std::vector<double>> binomial(static_cast<std::size_t>(n));
    std::vector<Triplet> entries;
    for (Index i = 0; i < n; ++i) {
      auto& row = binomial[static_cast<std::size_t>(i)];
      for (Index j = 0; j <= i; ++j) {
        const double above =
            i > j ? binomial[static_cast<std::size_t>(i - 1)][static_cast<std::size_t>(j)] : 0;
        row.push_back(j == 0 ? 1 : row.back() + (i > j ? above : row.back()));
        entries.push_back({i, j, row.back()});
      }
    }
    const Case subject = make_case(from_triplets(n, entries));
    if (n <= 28) {
      EXPECT_EQ(ball_inertia(subject.matrix()).positive, n);
    }
    expect_true(subject, tally);
  }
  record("pascal", tally);
}

/// Wilkinson's W+ of 2 m + 1 rows, `copies` of it glued end to end by entries `glue`, less `shift`.
SymmetricMatrix wilkinson(Index m, Index copies, double glue) {
  std::vector<Triplet> entries;
  const Index rows = 2 * m + 1;
  for (Index i = 0; i < rows * copies; ++i) {
    entries.push_back({i, i, std::fabs(static_cast<double>(m) - i % rows)});
    if (i > 0) entries.push_back({i, i - 1, i % rows == 0 ? glue : 1});
  }
  return from_triplets(rows * copies, entries);
}

SymmetricMatrix identity(Index rows) {
  std::vector<Triplet> entries;
  for (Index i = 0; i < rows; ++i) entries.push_back({i, i, 1});
  return from_triplets(rows, entries);
}

/// Shifts on and around approximate eigenvalues of the pencil: at distances down to one unit in the last
/// place.
void sweep_around(Case& subject, const std::vector<double>& eigenvalues, double sign,
                  const std::string& name) {
  Tally near[std::size(kWays)], far[std::size(kWays)];
  for (const double eigenvalue : eigenvalues) {
    for (const double distance : {0.0, 0x1p-52, -0x1p-52, 1e-14, -1e-12, 1e-9, -1e-6, 1e-3}) {
      const double shift = eigenvalue * (1 + distance);
      SCOPED_TRACE(testing::Message() << "shift " << shift << " distance " << distance);
      subject.coefficients[1] = sign * shift;
      const BallInertia truth = ball_inertia(subject.matrix());
      // What 3,072 bits leave open right on an eigenvalue is an exact zero: the closed form gives 6 for this
      // one.
      const Index zero = distance == 0 ? truth.open : 0;
      ASSERT_EQ(truth.open, zero);
      for (std::size_t w = 0; w < std::size(kWays); ++w) {
        expect_true(subject, kWays[w], truth, zero, std::fabs(distance) < 1e-7 ? near[w] : far[w]);
      }
    }
  }
  record(name + "_near", near);
  record(name + "_far", far);
  for (const Tally& of_way : far) EXPECT_EQ(of_way.left_open, 0) << "clear cases must be answered";
}

TEST(Balls, ShiftsAtWilkinsonsPairs) {
  // W+ has pairs that agree to more digits than double holds (Wilkinson, The Algebraic Eigenvalue Problem,
  // 1965, p. 308).
  for (const Index m : {10, 50}) {
    const SymmetricMatrix matrix = wilkinson(m, 1, 0);
    auto values = test::eigenvalues(matrix);
    Case subject = make_pencil(matrix, identity(matrix.rows));
    sweep_around(subject, {values.back(), values[values.size() / 2], values[1]}, -1, "wilkinson");
  }
}

TEST(Balls, ShiftsInGluedClusters) {
  for (const double glue : {1e-4, 1e-8, 1e-14}) {
    const SymmetricMatrix matrix = wilkinson(10, 5, glue);
    const auto values = test::eigenvalues(matrix);
    Case subject = make_pencil(matrix, identity(matrix.rows));
    sweep_around(subject, {values.back(), values[values.size() / 3]}, -1, "glued");
  }
}

TEST(Balls, ShiftsOnAndNextToClosedFormEigenvalues) {
  auto spectrum = test::laplacian_spectrum(5, 4, 4);
  std::sort(spectrum.begin(), spectrum.end());
  const SymmetricMatrix matrix = test::laplacian(5, 4, 4);
  Case subject = make_pencil(matrix, identity(matrix.rows));
  sweep_around(subject, {spectrum[0], spectrum[20], spectrum[40]}, -1, "laplacian");
}

/// Eigenvalues s of K x = s M x (LAPACK), ascending.
std::vector<double> pencil_eigenvalues(const SymmetricMatrix& stiffness, const SymmetricMatrix& definite) {
  std::vector<double> a = test::to_dense(stiffness), b = test::to_dense(definite);
  const int n = stiffness.rows, type = 1, lwork = 34 * n;
  std::vector<double> values(static_cast<std::size_t>(n)), work(static_cast<std::size_t>(lwork));
  int info = 0;
  dsygv_(&type, "N", "L", &n, a.data(), &n, b.data(), &n, values.data(), work.data(), &lwork, &info);
  EXPECT_EQ(info, 0);
  return values;
}

TEST(Balls, ShiftsAtFrequenciesOfAFrame) {
  const auto specimen = make_specimen("frame", 130);
  ASSERT_TRUE(specimen.ok());
  const auto values = pencil_eigenvalues(specimen->stiffness, *specimen->mass);
  Case subject = make_pencil(specimen->stiffness, *specimen->mass);
  sweep_around(subject, {values[0], values[values.size() / 2], values.back()}, -1, "frequencies");
}

TEST(Balls, ShiftsAtCriticalLoadsOfAPlate) {
  const auto specimen = make_specimen("plate", 120);
  ASSERT_TRUE(specimen.ok());
  // K + f G singular: G x = -(1/f) K x, so the smallest eigenvalues of (G, K) give the first positive
  // factors.
  const auto values = pencil_eigenvalues(*specimen->geometric, specimen->stiffness);
  ASSERT_LT(values[1], 0);
  Case subject = make_pencil(specimen->stiffness, *specimen->geometric);
  sweep_around(subject, {-1 / values[0], -1 / values[1]}, 1, "critical");
}

TEST(Balls, ExactlySingularNetsAndSaddlePoints) {
  // Whole numbers, so every entry is exact: a free net of springs has one zero direction (it hangs together),
  // repeated constraints one each.
  Random random(77);
  Tally tally[std::size(kWays)];
  for (const Index n : {40, 120, 200}) {
    SCOPED_TRACE(n);
    expect_true(make_case(spring_net(random, n, 1 << 20, 0)), tally, 1);
  }
  for (const Index constraints : {6, 24}) {
    const Index unknowns = 80, repeated = constraints / 3;
    std::vector<Triplet> entries;
    for (Index i = 0; i < unknowns; ++i) {
      entries.push_back({i, i, 3 + static_cast<double>(i % 4)});
      if (i > 0) entries.push_back({i, i - 1, -1});
    }
    for (Index c = 0; c < constraints; ++c) {
      const Index like = c >= constraints - repeated ? c - repeated : c;
      for (Index k = 0; k < 4; ++k) {
        entries.push_back({unknowns + c, (like * 3 + k * 17) % unknowns, 1.0 + (like + k) % 3});
      }
    }
    SCOPED_TRACE(constraints);
    expect_true(make_case(from_triplets(unknowns + constraints, entries)), tally, repeated);
  }
  record("singular", tally);
  for (const Way way : {Way::kRelative, Way::kSingle}) {
    const Tally& of_way = tally[static_cast<int>(way)];
    EXPECT_EQ(of_way.left_open, of_way.cases) << "a singular matrix must not pass the relative test";
  }
}

}  // namespace
}  // namespace stanchion
