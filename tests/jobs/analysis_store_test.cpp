#include "jobs/analysis_store.hpp"

#include <fcntl.h>
#include <gtest/gtest.h>
#include <sys/stat.h>

#include <atomic>
#include <chrono>
#include <filesystem>
#include <thread>

#include "base/digest.hpp"
#include "jobs/durable_file.hpp"
#include "jobs/folder.hpp"
#include "order/ordering.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

const std::string kKey = sha256("a key");

KnownOrder order_of(std::initializer_list<Index> entries) {
  KnownOrder order{Buffer<Index>(static_cast<Offset>(entries.size())), 1};
  Offset k = 0;
  for (const Index entry : entries) order.vertex_at[k++] = entry;
  return order;
}

std::vector<Index> entries_of(const std::optional<KnownOrder>& order) {
  return order ? std::vector<Index>(order->vertex_at.begin(), order->vertex_at.end()) : std::vector<Index>{};
}

void write_plainly(const std::string& path, const std::string& bytes) {
  std::ofstream(path, std::ios::binary) << bytes;
}

TEST(AnalysisStore, FindsWhatWasLeftByAnother) {
  const TestFolder folder;
  AnalysisStore first(folder / "store");
  EXPECT_FALSE(first.find(kKey));
  first.keep(kKey, order_of({2, 0, 1}));
  AnalysisStore second(folder / "store");
  EXPECT_EQ(entries_of(second.find(kKey)), (std::vector<Index>{2, 0, 1}));
  EXPECT_FALSE(second.find(sha256("another key")));
}

TEST(AnalysisStore, PassesOverEveryDamagedFile) {
  const TestFolder folder;
  AnalysisStore store(folder.path());
  (void)store.find(kKey);
  store.keep(kKey, order_of({2, 0, 1}));
  const std::string good = *read_whole(store.path_of(kKey));
  for (std::size_t k = 0; k < good.size(); k += 7) {
    std::string bad = good;
    bad[k] = static_cast<char>(bad[k] ^ 1);
    write_plainly(store.path_of(kKey), bad);
    EXPECT_FALSE(store.find(kKey)) << "byte " << k;
    store.give_up();
    write_plainly(store.path_of(kKey), good.substr(0, k));
    EXPECT_FALSE(store.find(kKey)) << "cut at " << k;
    store.give_up();
  }
  // A file under another's name.
  ASSERT_TRUE(write_durably(store.path_of(kKey), good).ok());
  EXPECT_TRUE(store.find(kKey));
}

TEST(AnalysisStore, WaitsForWhoeverIsFindingTheSame) {
  const TestFolder folder;
  AnalysisStore first(folder.path());
  ASSERT_FALSE(first.find(kKey));
  std::atomic<bool> found{false};
  std::vector<Index> entries;
  std::thread other([&] {
    AnalysisStore second(folder.path());
    entries = entries_of(second.find(kKey));
    found = true;
  });
  std::this_thread::sleep_for(std::chrono::milliseconds(100));
  EXPECT_FALSE(found);
  first.keep(kKey, order_of({1, 0}));
  other.join();
  EXPECT_EQ(entries, (std::vector<Index>{1, 0}));
}

TEST(AnalysisStore, WithoutAWritableFolderEveryRunFindsItsOwn) {
  const TestFolder folder;
  folder.write("file", "not a folder");
  AnalysisStore store(folder / "file/store");
  EXPECT_FALSE(store.find(kKey));
  store.keep(kKey, order_of({0}));
  EXPECT_FALSE(store.find(kKey));
}

/// Sets when `path` was used last.
void use(const std::string& path, int seconds_ago) {
  const timespec when{::time(nullptr) - seconds_ago, 0};
  const timespec both[2] = {when, when};
  ASSERT_EQ(::utimensat(AT_FDCWD, path.c_str(), both, 0), 0);
}

TEST(AnalysisStore, WhatWasUsedLeastRecentlyMakesRoom) {
  const TestFolder folder;
  AnalysisStore store(folder.path());
  const std::string first = sha256("first"), second = sha256("second"), third = sha256("third");
  int ago = 300;
  for (const std::string& key : {first, second, third}) {
    (void)store.find(key);
    store.keep(key, order_of({2, 0, 1}));
    use(store.path_of(key), ago -= 60);
  }
  const auto stored = stored_orders(folder.path());
  ASSERT_EQ(stored.size(), 3U);
  EXPECT_EQ(stored.front().key, third);
  const std::int64_t each = stored.front().bytes;
  EXPECT_EQ(trim_orders(folder.path(), 3 * each), 0);
  EXPECT_TRUE(store.find(first));  // and so it is the newest
  EXPECT_EQ(trim_orders(folder.path(), 3 * each - 1), 1);
  EXPECT_FALSE(store.find(second));
  store.give_up();
  EXPECT_TRUE(store.find(first) && store.find(third));
  EXPECT_EQ(trim_orders(folder.path(), each / 2), 2);
  EXPECT_TRUE(stored_orders(folder.path()).empty());
}

TEST(AnalysisStore, RoomIsMadeOfOrdersAndLeftoversOnly) {
  const TestFolder folder;
  AnalysisStore store(folder.path());
  (void)store.find(kKey);
  store.keep(kKey, order_of({0}));
  const std::string old_half = store.path_of(kKey) + ".aBcDeF", new_half = store.path_of(kKey) + ".GhIjKl";
  const std::string notes = folder.write("notes.order", "somebody's own"),
                    beside = store.path_of(kKey).substr(0, folder.path().size() + 4) + "mine.order";
  for (const std::string& path : {old_half, new_half, beside}) write_plainly(path, "x");
  use(old_half, 7200);
  use(new_half, 60);
  use(beside, 7200);
  drop_abandoned_orders(folder.path());
  EXPECT_FALSE(std::filesystem::exists(old_half));
  EXPECT_EQ(trim_orders(folder.path(), 0), 1);
  for (const std::string& path : {new_half, notes, beside})
    EXPECT_TRUE(std::filesystem::exists(path)) << path;
  EXPECT_EQ(trim_orders(folder / "none", 0), 0);
}

/// Returns whatever it is told to.
class PlantedOrders : public KnownOrders {
 public:
  std::optional<KnownOrder> find(const std::string&) override { return KnownOrder{planted.clone(), 0}; }
  void keep(const std::string&, const KnownOrder&) override { ++kept; }
  void give_up() override {}
  Buffer<Index> planted;
  int kept = 0;
};

TEST(AnalysisStore, AnOrderThatIsNoPermutationIsNotUsed) {
  const SymmetricMatrix matrix = test::laplacian(40, 1, 1);
  const auto plain = order_equations({&matrix, {}});
  ASSERT_TRUE(plain.ok());
  const Index vertices = plain->graph.vertices;
  PlantedOrders orders;
  for (const int kind : {0, 1, 2, 3}) {
    orders.planted = Buffer<Index>(kind == 0 ? vertices - 1 : vertices);
    for (Offset k = 0; k < orders.planted.size(); ++k) orders.planted[k] = static_cast<Index>(k);
    if (kind == 1) orders.planted[1] = 0;
    if (kind == 2) orders.planted[3] = -1;
    if (kind == 3) orders.planted[3] = vertices;
    const auto order = order_equations({&matrix, {}, true, false, &orders});
    ASSERT_TRUE(order.ok());
    EXPECT_FALSE(order->known);
    EXPECT_EQ(orders.kept, kind + 1);
    EXPECT_TRUE(std::equal(order->vertex_at.begin(), order->vertex_at.end(), plain->vertex_at.begin()));
  }
  orders.planted = Buffer<Index>(vertices);
  for (Index v = 0; v < vertices; ++v) orders.planted[v] = vertices - 1 - v;
  const auto order = order_equations({&matrix, {}, true, false, &orders});
  ASSERT_TRUE(order.ok());
  EXPECT_TRUE(order->known);
  EXPECT_EQ(order->vertex_at[0], vertices - 1);
}

}  // namespace
}  // namespace stanchion
