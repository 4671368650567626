#include "base/threads.hpp"

#include <gtest/gtest.h>

#include <stdexcept>
#include <vector>

namespace stanchion {
namespace {

TEST(ThreadPool, RunsEveryPieceExactlyOnceForAnyPoolSize) {
  for (int threads = 1; threads <= 9; ++threads) {
    ThreadPool pool(threads);
    EXPECT_EQ(pool.size(), threads);
    for (const Offset pieces : {0, 1, 2, 3, 7, 64, 1000}) {
      std::vector<std::atomic<int>> runs(static_cast<std::size_t>(pieces));
      std::atomic<bool> worker_in_range{true};
      pool.run(pieces, [&](Offset piece, int worker) {
        ++runs[static_cast<std::size_t>(piece)];
        if (worker < 0 || worker >= threads) worker_in_range = false;
      });
      EXPECT_TRUE(worker_in_range);
      for (const auto& count : runs) EXPECT_EQ(count, 1) << threads << " threads, " << pieces << " pieces";
    }
  }
}

TEST(ThreadPool, OneWorkerNeverHoldsTwoPiecesAtOnce) {
  ThreadPool pool(4);
  std::vector<std::atomic<int>> inside(4);
  std::atomic<int> collisions{0};
  pool.run(2000, [&](Offset, int worker) {
    auto& mine = inside[static_cast<std::size_t>(worker)];
    if (mine.fetch_add(1) != 0) ++collisions;
    mine.fetch_sub(1);
  });
  EXPECT_EQ(collisions, 0);
}

TEST(ThreadPool, WhatThePiecesWroteIsSeenByTheCaller) {
  ThreadPool pool(3);
  std::vector<Offset> values(500);
  for (Offset round = 1; round <= 300; ++round) {
    pool.run(500, [&](Offset piece, int) { values[static_cast<std::size_t>(piece)] = piece * round; });
    ASSERT_EQ(values[499], 499 * round);
    ASSERT_EQ(values[1], round);
  }
}

TEST(ThreadPool, AnExceptionReachesTheCallerAfterTheOthersFinished) {
  for (int threads = 1; threads <= 4; ++threads) {
    ThreadPool pool(threads);
    for (int round = 0; round < 50; ++round) {
      std::atomic<int> runs{0};
      const auto work = [&](Offset piece, int) {
        ++runs;
        if (piece == 17) throw std::runtime_error("piece 17");
      };
      EXPECT_THROW(pool.run(100, work), std::runtime_error);
      EXPECT_EQ(runs, 100);
    }
  }
}

TEST(ThreadPool, OfSeveralExceptionsOneArrivesAndThePoolStaysUsable) {
  ThreadPool pool(3);
  EXPECT_THROW(pool.run(40, [](Offset piece, int) { throw std::out_of_range(std::to_string(piece)); }),
               std::out_of_range);
  std::atomic<int> runs{0};
  pool.run(40, [&](Offset, int) { ++runs; });
  EXPECT_EQ(runs, 40);
}

TEST(ThreadPool, SharedPiecesInsidePiecesRunExactlyOnce) {
  for (int threads = 1; threads <= 5; ++threads) {
    ThreadPool pool(threads);
    for (const Offset outer : {1, 2, 3, 9}) {
      std::vector<std::atomic<int>> runs(static_cast<std::size_t>(outer) * 40);
      pool.run_sharing(outer, [&](Offset piece, int) {
        for (int round = 0; round < 50; ++round) {
          pool.share(40, [&](Offset part) { ++runs[static_cast<std::size_t>(piece * 40 + part)]; });
        }
      });
      for (const auto& count : runs) ASSERT_EQ(count, 50) << threads << " threads, " << outer << " pieces";
    }
  }
}

TEST(ThreadPool, AnIdleWorkerTakesPartInWhatAnotherShares) {
  ThreadPool pool(2);
  std::atomic<int> met{0};
  // Each of the two parts waits for the other: only two workers at once can end them.
  pool.run_sharing(1, [&](Offset, int) {
    pool.share(2, [&](Offset) {
      ++met;
      while (met.load() < 2) std::this_thread::yield();
    });
  });
  EXPECT_EQ(met, 2);
}

TEST(ThreadPool, WhatSharedPiecesWroteIsSeenByTheirOwner) {
  ThreadPool pool(3);
  std::vector<Offset> values(64);
  pool.run_sharing(1, [&](Offset, int) {
    for (Offset round = 1; round <= 2000; ++round) {
      pool.share(64, [&](Offset part) { values[static_cast<std::size_t>(part)] = part * round; });
      ASSERT_EQ(values[63], 63 * round);
    }
  });
}

TEST(ThreadPool, AnExceptionInASharedPieceReachesItsOwner) {
  ThreadPool pool(3);
  std::atomic<int> caught{0};
  pool.run_sharing(6, [&](Offset, int) {
    try {
      pool.share(30, [](Offset part) {
        if (part == 11) throw std::runtime_error("part 11");
      });
    } catch (const std::runtime_error&) {
      ++caught;
    }
  });
  EXPECT_EQ(caught, 6);
}

TEST(ThreadPool, SharingOutsideAnyPieceUsesEveryone) {
  ThreadPool pool(4);
  std::atomic<Offset> sum{0};
  pool.share(100, [&](Offset part) { sum += part; });
  EXPECT_EQ(sum, 4950);
}

TEST(ThreadPool, ManyPoolsComeAndGo) {
  Offset total = 0;
  for (int round = 0; round < 200; ++round) {
    ThreadPool pool(1 + round % 4);
    std::atomic<Offset> sum{0};
    if (round % 3 != 0) pool.run(10, [&](Offset piece, int) { sum += piece; });
    total += sum;
  }
  EXPECT_EQ(total, Offset{133} * 45);
}

TEST(AvailableProcessors, IsAtLeastOne) {
  EXPECT_GE(available_processors(), 1);
}

}  // namespace
}  // namespace stanchion
