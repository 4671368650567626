// The property everything rests on: no statement at level proved is ever wrong, and statements at level
// statistical are wrong no more often than their risk allows. Truth: exact integer arithmetic (fraction-free
// elimination).
#include <gtest/gtest.h>

#include <cmath>
#include <cstdlib>
#include <map>

#include "inertia/certify.hpp"
#include "support/dense_reference.hpp"
#include "support/exact_inertia.hpp"
#include "support/factored.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::Random;

/// A whole number from the environment.
int asked(const char* name, int otherwise) {
  const char* value = std::getenv(name);
  return value != nullptr ? std::atoi(value) : otherwise;
}

int cases() {
  return asked("STANCHION_CASES", 2000);
}

/// Other cases for every STANCHION_CASES_FROM: a long run may be made piece by piece.
Random cases_of(std::uint64_t test) {
  return Random(test + 1000003ULL * static_cast<std::uint64_t>(asked("STANCHION_CASES_FROM", 0)));
}

/// A random dyadic symmetric matrix, often singular or nearly so, on purpose: small integers, rank-deficient
/// sums, glued copies, penalty springs of 2^k, pivots of 2^-k.
SymmetricMatrix trouble(Random& random, int number) {
  const auto n = static_cast<Index>(2 + random() % 14);
  std::vector<Triplet> entries;
  const auto integer = [&](int size) {
    return static_cast<double>(static_cast<int>(random() % (2 * size + 1)) - size);
  };
  switch (number % 6) {
    case 0:  // small integers, sparse
      for (Index i = 0; i < n; ++i) {
        for (Index j = 0; j <= i; ++j) {
          if (i == j || random() % 3 == 0) entries.push_back({i, j, integer(4)});
        }
      }
      break;
    case 1: {  // sum of few rank-one terms with signs: exact nullity
      const auto rank = static_cast<Index>(random() % static_cast<std::uint64_t>(n)) + 1;
      for (Index r = 0; r < rank; ++r) {
        std::vector<double> v(static_cast<std::size_t>(n));
        for (double& x : v) x = integer(3);
        const double sign = random() % 2 == 0 ? 1 : -1;
        for (Index i = 0; i < n; ++i) {
          for (Index j = 0; j <= i; ++j) {
            entries.push_back({i, j, sign * v[static_cast<std::size_t>(i)] * v[static_cast<std::size_t>(j)]});
          }
        }
      }
      break;
    }
    case 2: {  // free or held chain with penalty and soft springs
      const double power = std::ldexp(1.0, static_cast<int>(random() % 41) - 20);
      for (Index i = 1; i < n; ++i) {
        const double k = random() % 4 == 0 ? power : 1 + static_cast<double>(random() % 3);
        entries.insert(entries.end(), {{i, i, k}, {i - 1, i - 1, k}, {i, i - 1, -k}});
      }
      if (random() % 2 == 0) entries.push_back({0, 0, std::ldexp(1.0, -static_cast<int>(random() % 45))});
      break;
    }
    case 3:  // zero or tiny leading diagonals
      for (Index i = 0; i < n; ++i) {
        for (Index j = 0; j < i; ++j) entries.push_back({i, j, integer(3)});
        entries.push_back(
            {i, i, random() % 2 == 0 ? 0.0 : std::ldexp(1.0, -static_cast<int>(random() % 50))});
      }
      break;
    case 4: {  // saddle points with repeated constraints
      const Index m = n / 3;
      for (Index i = 0; i < n - m; ++i) entries.push_back({i, i, 1 + static_cast<double>(random() % 3)});
      for (Index c = 0; c < m; ++c) {
        const Index like = c > 0 && random() % 2 == 0 ? 0 : c;
        for (Index i = 0; i < n - m; ++i) entries.push_back({n - m + c, i, ((i * 7 + like * 3) % 5) - 2.0});
      }
      break;
    }
    default: {  // singular by construction, then moved by one unit of 2^-k: eigenvalues next to zero
      for (Index i = 1; i < n; ++i)
        entries.insert(entries.end(), {{i, i, 2}, {i - 1, i - 1, 2}, {i, i - 1, -2}});
      const double move = std::ldexp(random() % 2 == 0 ? 1.0 : -1.0, -static_cast<int>(random() % 60));
      entries.push_back({n / 2, n / 2, move});
      break;
    }
  }
  return from_triplets(n, entries);
}

/// Power of ten of the condition number, by dense eigenvalues.
int condition_power(const SymmetricMatrix& matrix) {
  double least = INFINITY, most = 0;
  for (const double value : test::eigenvalues(matrix)) {
    least = std::min(least, std::fabs(value));
    most = std::max(most, std::fabs(value));
  }
  return least > 0 ? std::min(20, static_cast<int>(std::log10(most / least))) : 20;
}

bool right(const CertifiedInertia& found, const test::ExactInertia& truth) {
  const Inertia& inertia = found.inertia;
  if (found.certificate.level == Level::kNone) return true;
  return inertia.negative <= truth.negative && inertia.positive <= truth.positive &&
         inertia.negative + inertia.zero >= truth.negative &&
         inertia.positive + inertia.zero >= truth.positive;
}

/// Statistical statements allowed, and memory for any factor.
CertifyOptions with_risk(RiskBudget& risk, std::uint64_t seed) {
  CertifyOptions options;
  options.risk = &risk;
  options.seed = seed;
  options.most_factor_bytes = Offset{1} << 40;
  return options;
}

TEST(CertificateProperty, NoWrongStatementAtLevelProved) {
  Random random = cases_of(20261201);
  int wrong = 0, unsettled = 0, clear = 0;
  for (int number = 0; number < cases(); ++number) {
    const SymmetricMatrix matrix = trouble(random, number);
    const auto truth = test::exact_inertia(matrix);
    const auto prepared = test::prepare(matrix);
    OffsetOptions options;
    options.definite_first = number % 2 == 0;
    auto found = certify_by_offsets(prepared.analysis, prepared.shifted(0), options, *prepared.pool);
    ASSERT_TRUE(found.ok()) << found.status().to_string();
    if (!right(*found, truth)) {
      ++wrong;
      ADD_FAILURE() << "case " << number << ": proved " << found->inertia.negative << " "
                    << found->inertia.zero << " " << found->inertia.positive << ", exactly " << truth.negative
                    << " " << truth.zero << " " << truth.positive;
    }
    if (truth.zero == 0) {
      ++clear;
      unsettled += found->inertia.zero > 0 || found->certificate.level == Level::kNone;
    }
  }
  EXPECT_EQ(wrong, 0);
  RecordProperty("nonsingular_cases", clear);
  RecordProperty("nonsingular_left_open", unsettled);
}

TEST(CertificateProperty, StatisticalStatementsAreWrongNoMoreOftenThanTheirRisk) {
  // At risk 0.01 a document, wrong statements among N may exceed N * 0.01 by no more than five standard
  // deviations.
  Random random = cases_of(7);
  int wrong = 0, certified = 0, nonsingular = 0;
  for (int number = 0; number < cases(); ++number) {
    const SymmetricMatrix matrix = trouble(random, number);
    const auto truth = test::exact_inertia(matrix);
    const auto prepared = test::prepare(matrix);
    FactorOptions options;
    options.keep_factor = true;
    const Factorization f = prepared.factor(0, options);
    RiskBudget risk(0.01);
    const auto test =
        certify_relative(prepared.analysis, prepared.shifted(0), f, risk, random(), *prepared.pool);
    ASSERT_TRUE(test.ok());
    nonsingular += truth.zero == 0;
    if (!test->certified) continue;
    ++certified;
    wrong += test->negative != truth.negative || test->positive != truth.positive;
  }
  const double expected = 0.01 * cases();
  EXPECT_LE(wrong, expected + 5 * std::sqrt(expected));
  EXPECT_GT(certified, nonsingular * 8 / 10) << "the test must settle most nonsingular cases";
  RecordProperty("wrong", wrong);
  RecordProperty("certified", certified);
}

TEST(CertificateProperty, NoWrongStatementInSinglePrecision) {
  Random random = cases_of(9);
  int certified = 0, mild = 0, mild_open = 0;
  for (int number = 0; number < cases(); ++number) {
    const SymmetricMatrix matrix = trouble(random, number);
    const auto truth = test::exact_inertia(matrix);
    const auto prepared = test::prepare(matrix);
    RiskBudget risk(1e-6);
    CertifyOptions options = with_risk(risk, random());
    options.single = SingleUse::kOnly;
    const auto found = certify_inertia(prepared.analysis, prepared.shifted(0), options, *prepared.pool);
    ASSERT_TRUE(found.ok()) << found.status().to_string();
    EXPECT_TRUE(right(*found, truth)) << "case " << number;
    EXPECT_EQ(found->factorizations, 1);
    const bool open = found->certificate.level == Level::kNone;
    certified += !open;
    if (truth.zero > 0 || condition_power(matrix) > 2) continue;
    ++mild;
    mild_open += open;
  }
  RecordProperty("certified", certified);
  EXPECT_LE(mild_open, mild / 20) << "clear cases must be answered";
}

TEST(CertificateProperty, NoWrongStatementAtTheDefaultRisk) {
  Random random = cases_of(8);
  std::map<int, std::pair<int, int>> by_condition;  // power of ten -> nonsingular cases, left open
  for (int number = 0; number < cases(); ++number) {
    const SymmetricMatrix matrix = trouble(random, number);
    const auto truth = test::exact_inertia(matrix);
    const auto prepared = test::prepare(matrix);
    RiskBudget risk(1e-6);
    CertifyOptions options = with_risk(risk, random());
    options.offsets.definite_first = number % 2 == 1;
    const auto found = certify_inertia(prepared.analysis, prepared.shifted(0), options, *prepared.pool);
    ASSERT_TRUE(found.ok());
    EXPECT_TRUE(right(*found, truth)) << "case " << number;
    EXPECT_LE(risk.spent(), 1e-6);
    if (truth.zero > 0) continue;
    auto& [cases_here, open_here] = by_condition[condition_power(matrix)];
    ++cases_here;
    open_here += found->inertia.zero > 0 || found->certificate.level == Level::kNone;
  }
  int well_conditioned = 0, well_conditioned_open = 0;
  for (const auto& [power, counts] : by_condition) {
    RecordProperty("condition_1e" + std::to_string(power),
                   std::to_string(counts.second) + " of " + std::to_string(counts.first) + " left open");
    if (power <= 10) {
      well_conditioned += counts.first;
      well_conditioned_open += counts.second;
    }
  }
  EXPECT_LE(well_conditioned_open, well_conditioned / 100) << "clear cases must be answered";
}

}  // namespace
}  // namespace stanchion
