#include <gtest/gtest.h>

#include <cstdio>
#include <filesystem>
#include <fstream>
#include <sstream>
#include <string>

#include <unistd.h>

namespace {

struct Seen {
  std::string tunables, arguments;
  long long kilobytes_on_large_pages = -1;
};

Seen run_probe(const std::string& environment, const std::string& arguments) {
  FILE* output = ::popen(
      ("env -u GLIBC_TUNABLES " + environment + " " STANCHION_LARGE_HEAP_PROBE " " + arguments).c_str(), "r");
  std::string text;
  for (int c = std::fgetc(output); c != EOF; c = std::fgetc(output)) text += static_cast<char>(c);
  EXPECT_EQ(::pclose(output), 0);
  Seen seen;
  std::istringstream lines(text);
  std::getline(lines, seen.tunables);
  std::getline(lines, seen.arguments);
  lines >> seen.kilobytes_on_large_pages;
  return seen;
}

bool large_pages_on_request() {
  std::ifstream file("/sys/kernel/mm/transparent_hugepage/enabled");
  std::string words;
  std::getline(file, words);
  return words.find("[madvise]") != std::string::npos;
}

constexpr char kSetting[] =
    "glibc.malloc.hugetlb=1:glibc.malloc.mmap_threshold=4194304:glibc.malloc.top_pad=8388608:"
    "glibc.malloc.trim_threshold=268435456";

class LargeHeap : public ::testing::Test {
 protected:
  void SetUp() override {
    if (!large_pages_on_request()) GTEST_SKIP() << "this system gives large pages to all or to none";
  }
};

TEST_F(LargeHeap, BeginsAnewWithTheSettingAndTheSameArguments) {
  const Seen seen = run_probe("", "large one --two=3");
  EXPECT_EQ(seen.tunables, kSetting);
  EXPECT_EQ(seen.arguments, STANCHION_LARGE_HEAP_PROBE " large one --two=3");
  EXPECT_GE(seen.kilobytes_on_large_pages,
            2 << 10);  // one page at least: how many the system has is its affair
}

TEST_F(LargeHeap, StaysAsItIsWhereNoneIsWanted) {
  const Seen seen = run_probe("", "small");
  EXPECT_EQ(seen.tunables, "-");
  EXPECT_LT(seen.kilobytes_on_large_pages, 32 << 10);
}

TEST_F(LargeHeap, KeepsOtherSettingsAndVariables) {
  EXPECT_EQ(run_probe("GLIBC_TUNABLES=glibc.pthread.rseq=1", "large").tunables,
            std::string("glibc.pthread.rseq=1:") + kSetting);
  EXPECT_EQ(run_probe("GLIBC_TUNABLES=", "large").tunables, kSetting);
}

TEST_F(LargeHeap, LeavesAChoiceThatWasMade) {
  EXPECT_EQ(run_probe("GLIBC_TUNABLES=glibc.malloc.tcache_count=5", "large").tunables,
            "glibc.malloc.tcache_count=5");
  const Seen seen = run_probe("GLIBC_TUNABLES=glibc.malloc.hugetlb=0", "large");
  EXPECT_EQ(seen.tunables, "glibc.malloc.hugetlb=0");
  EXPECT_LT(seen.kilobytes_on_large_pages, 32 << 10);
}

TEST_F(LargeHeap, CountsTheFilesThatArgumentsName) {
  const std::string name =
      (std::filesystem::temp_directory_path() / ("large_heap_" + std::to_string(::getpid()))).string();
  std::ofstream(name) << std::string(600, 'x');
  EXPECT_EQ(run_probe("", "by-size " + name).tunables, "-");
  EXPECT_EQ(run_probe("", "by-size " + name + " --nodes=" + name).tunables, kSetting);
  EXPECT_EQ(run_probe("", "by-size " + name + " --missing=" + name + "x -x /tmp").tunables, "-");
  std::filesystem::remove(name);
}

}  // namespace
