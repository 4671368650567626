// Room in the store: what is dropped, in which order, and what never is.
#include "service/input_store.hpp"

#include <fcntl.h>
#include <gtest/gtest.h>
#include <sys/stat.h>

#include <filesystem>
#include <fstream>

namespace stanchion::service {
namespace {

namespace fs = std::filesystem;

class InputStoreTest : public testing::Test {
 protected:
  void SetUp() override {
    folder_ = fs::temp_directory_path() / ("stanchion-store-" + std::to_string(::getpid()) + "-" +
                                           testing::UnitTest::GetInstance()->current_test_info()->name());
    fs::create_directories(folder_);
    auto opened = JobJournal::open((folder_ / "jobs.sqlite").string());
    ASSERT_TRUE(opened.ok());
    journal_ = std::move(*opened);
  }
  void TearDown() override {
    journal_.reset();
    fs::remove_all(folder_);
  }

  /// An analysis of `bytes` that was used `seconds_ago`.
  fs::path leave_analysis(char name, std::size_t bytes, int seconds_ago) {
    const fs::path path = folder_ / "analyses" / std::string(2, name) / (std::string(64, name) + ".order");
    fs::create_directories(path.parent_path());
    std::ofstream(path) << std::string(bytes, 'x');
    use(path, seconds_ago);
    return path;
  }

  static void use(const fs::path& path, int seconds_ago) {
    const timespec when{::time(nullptr) - seconds_ago, 0};
    const timespec both[2] = {when, when};
    ASSERT_EQ(::utimensat(AT_FDCWD, path.c_str(), both, 0), 0);
  }

  std::string upload(InputStore& store, const std::string& text) {
    auto begun = store.begin(1 << 20);
    EXPECT_TRUE(begun.ok() && (*begun)->take(text));
    const auto done = store.finish(**begun, std::nullopt, "");
    EXPECT_TRUE(done.ok());
    return done.ok() ? done->input.digest : "";
  }

  fs::path folder_;
  std::unique_ptr<JobJournal> journal_;
};

TEST_F(InputStoreTest, AnalysesUsedLeastRecentlyAreDroppedUntilTheRestFits) {
  InputStore store(folder_.string(), 10'000, *journal_);
  const auto oldest = leave_analysis('a', 4000, 400), middle = leave_analysis('b', 4000, 300),
             newest = leave_analysis('c', 4000, 200);
  store.evict();
  EXPECT_FALSE(fs::exists(oldest));
  EXPECT_TRUE(fs::exists(middle) && fs::exists(newest));
  EXPECT_EQ(store.evicted(), 1U);
  EXPECT_EQ(store.used_bytes(), 8000);
  // What is used again becomes the last one to go.
  use(middle, 0);
  const auto another = leave_analysis('d', 4000, 100);
  store.evict();
  EXPECT_FALSE(fs::exists(newest));
  EXPECT_TRUE(fs::exists(middle) && fs::exists(another));
  const auto listed = store.analyses();
  ASSERT_EQ(listed.size(), 2U);
  EXPECT_EQ(listed[0].path, middle.string());
}

TEST_F(InputStoreTest, NothingIsDroppedAtTheLimitAndAllThatIsTooLargeIs) {
  InputStore store(folder_.string(), 8000, *journal_);
  const auto first = leave_analysis('a', 4000, 20), second = leave_analysis('b', 4000, 10);
  store.evict();
  EXPECT_TRUE(fs::exists(first) && fs::exists(second));
  const auto large = leave_analysis('c', 9000, 5);
  store.evict();
  EXPECT_FALSE(fs::exists(first) || fs::exists(second) || fs::exists(large));
  EXPECT_EQ(store.used_bytes(), 0);
}

TEST_F(InputStoreTest, InputsAndAnalysesShareTheRoom) {
  InputStore store(folder_.string(), 10'000, *journal_);
  const std::string old_input = upload(store, std::string(4000, 'o'));
  const auto set_use = [&](const std::string& digest, std::int64_t seconds_ago) {
    const Status status = journal_->write([&](JobTable& table) {
      auto input = *table.find_input(digest);
      input.used_ms = now_ms() - 1000 * seconds_ago;
      table.put_input(input);
    });
    ASSERT_TRUE(status.ok());
  };
  set_use(old_input, 500);
  const auto old_analysis = leave_analysis('a', 4000, 400);
  const std::string new_input = upload(store, std::string(4000, 'n'));
  EXPECT_FALSE(store.open(old_input).ok());
  EXPECT_TRUE(store.open(new_input).ok() && fs::exists(old_analysis));
  // An input of this minute stays, for its job is about to come; an analysis goes before it.
  const std::string newest = upload(store, std::string(4000, 'm'));
  EXPECT_FALSE(fs::exists(old_analysis));
  EXPECT_TRUE(store.open(new_input).ok() && store.open(newest).ok());
}

TEST_F(InputStoreTest, WhatACrashLeftIsRemoved) {
  std::string kept;
  {
    InputStore store(folder_.string(), 100'000, *journal_);
    kept = upload(store, "kept");
  }
  const fs::path half = folder_ / "inputs" / "upload-7", nameless = folder_ / "inputs" / std::string(64, 'f');
  std::ofstream(half) << "half";
  std::ofstream(nameless) << "renamed, and then the power went";
  const InputStore store(folder_.string(), 100'000, *journal_);
  EXPECT_FALSE(fs::exists(half));
  EXPECT_FALSE(fs::exists(nameless));
  EXPECT_TRUE(store.open(kept).ok());
}

}  // namespace
}  // namespace stanchion::service
