// Signs of pivots that are counted wrong below everything that is certified: no certificate can notice, so
// the staircase must, and give out both certificates instead of an answer. The linker puts the wrong count in
// place of the right one (CMakeLists.txt).
#include <gtest/gtest.h>

#include <atomic>

#include "dense/pivot_sign.hpp"
#include "engine/model_files.hpp"
#include "model/exit_code.hpp"

namespace {

/// From this many factorized fronts on every negative pivot is called positive; as if the memory of a counter
/// were bad.
std::atomic<long> lie_from{-1}, fronts{0};

}  // namespace

// Under the linker's names for the function that is called and the one that is there (--wrap).
stanchion::SignCount right_signs(const stanchion::PivotArrays& pivots, stanchion::Index count) __asm__(
    "__real__ZN9stanchion14sign_of_pivotsERKNS_11PivotArraysEi");
stanchion::SignCount wrong_signs(const stanchion::PivotArrays& pivots, stanchion::Index count) __asm__(
    "__wrap__ZN9stanchion14sign_of_pivotsERKNS_11PivotArraysEi");

stanchion::SignCount wrong_signs(const stanchion::PivotArrays& pivots, stanchion::Index count) {
  stanchion::SignCount signs = right_signs(pivots, count);
  const long number = fronts++;
  if (lie_from >= 0 && number >= lie_from) {
    signs.positive += signs.negative;
    signs.negative = 0;
  }
  return signs;
}

namespace stanchion::test {
namespace {

/// A held chain of 40 springs: 40 values, closed form 2 - 2 cos(k pi / 41), ten of them below 0.55.
Result<Outcome> swept(const ModelFiles& files, long from) {
  Request request;
  request.input.stiffness = files.matrix("K.mtx", spring_chain(40, 2));
  request.threads = 1;
  request.sweep.from = 0.1;
  request.sweep.to = 1.1;
  request.sweep.points = 3;
  lie_from = from;
  fronts = 0;
  auto outcome = run_sweep(request, {});
  lie_from = -1;
  return outcome;
}

TEST(Contradiction, OfTwoCertifiedCountsIsReportedWithBothCertificates) {
  const ModelFiles files;
  const Outcome right = answer(swept(files, -1));
  const long all = fronts;
  ASSERT_TRUE(right.sweep && right.count);
  EXPECT_TRUE(right.sweep->contradictions.empty());
  EXPECT_NE(exit_code(right, Judgement{}), 5);
  // The last shift, counted wrong in all of its factorizations, has fewer values below it than the one
  // before.
  int contradicted = 0, other = 0;
  for (long from = 0; from < all; ++from) {
    auto outcome = swept(files, from);
    if (!outcome.ok()) {  // the two offsets of one count contradict each other already
      EXPECT_EQ(outcome.status().kind(), StatusKind::kInternal);
      ++other;
      continue;
    }
    ASSERT_TRUE(outcome->sweep && outcome->count);
    bool as_it_was = outcome->count->counts.size() == right.count->counts.size();
    for (std::size_t k = 0; as_it_was && k < right.count->counts.size(); ++k)
      as_it_was = outcome->count->counts[k].below == right.count->counts[k].below;
    if (as_it_was) continue;  // the lie came after the last negative pivot
    // Wrong alike at all shifts, or by so little at the last that the staircase still rises: nothing above
    // can tell.
    if (outcome->sweep->contradictions.empty()) continue;
    ++contradicted;
    const Contradiction& pair = outcome->sweep->contradictions.front();
    EXPECT_LT(pair.shift, pair.other_shift);
    EXPECT_GT(pair.least, pair.most);
    EXPECT_TRUE(warned(*outcome, "counts-contradict"));
    EXPECT_EQ(exit_code(*outcome, Judgement{}), 5);
    int certificates = 0;
    for (const ShiftCount& count : outcome->count->counts) {
      if (count.shift != pair.shift && count.shift != pair.other_shift) continue;
      EXPECT_NE(count.certificate.level, Level::kNone);
      ++certificates;
    }
    EXPECT_EQ(certificates, 2);
  }
  EXPECT_GT(contradicted + other, all / 4);
  EXPECT_GT(contradicted, all / 10);
}

}  // namespace
}  // namespace stanchion::test
