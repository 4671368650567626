// Which jobs are tried again, how often, and with how much memory.
#include "jobs/next_attempt.hpp"

#include <gtest/gtest.h>
#include <signal.h>

namespace stanchion {
namespace {

ChildEnd end_of(ChildEndKind kind, int signal = 0) {
  ChildEnd end;
  end.kind = kind;
  end.signal = signal;
  return end;
}

TEST(NextAttempt, MoreMemoryWhereThatWasMissing) {
  const ChildEnd end = end_of(ChildEndKind::kMemory);
  EXPECT_EQ(memory_of_next_attempt(end, {1, 0}, 100, 1000), 200);
  EXPECT_EQ(memory_of_next_attempt(end, {4, 0}, 800, 1000), 1000) << "up to the cap";
  EXPECT_FALSE(memory_of_next_attempt(end, {1, 0}, 1000, 1000)) << "it had all there is";
  EXPECT_FALSE(memory_of_next_attempt(end, {6, 0}, 100, 1000)) << "not for ever";
}

TEST(NextAttempt, OnceMoreAfterAKill) {
  const ChildEnd end = end_of(ChildEndKind::kKilled, SIGKILL);
  EXPECT_EQ(memory_of_next_attempt(end, {1, 0}, 100, 1000), 200);
  EXPECT_EQ(memory_of_next_attempt(end, {3, 0}, 1000, 1000), 1000) << "attempts without a kill do not count";
  EXPECT_FALSE(memory_of_next_attempt(end, {2, 1}, 100, 1000));
}

TEST(NextAttempt, AnAbortMayHaveBeenForWantOfMemory) {
  EXPECT_EQ(memory_of_next_attempt(end_of(ChildEndKind::kCrashed, SIGABRT), {1, 0}, 100, 1000), 1000);
  EXPECT_FALSE(memory_of_next_attempt(end_of(ChildEndKind::kCrashed, SIGABRT), {2, 0}, 100, 1000));
  EXPECT_FALSE(memory_of_next_attempt(end_of(ChildEndKind::kCrashed, SIGSEGV), {1, 0}, 100, 1000));
}

TEST(NextAttempt, NeverAfterAnAnswerOrAStop) {
  for (const ChildEndKind kind : {ChildEndKind::kExited, ChildEndKind::kStopped, ChildEndKind::kCpuTime}) {
    EXPECT_FALSE(memory_of_next_attempt(end_of(kind), {1, 0}, 100, 1000));
  }
}

}  // namespace
}  // namespace stanchion
