#include "cli/log_file.hpp"

#include <gtest/gtest.h>

#include <filesystem>
#include <fstream>
#include <nlohmann/json.hpp>
#include <regex>
#include <thread>

namespace stanchion::cli {
namespace {

namespace fs = std::filesystem;

class LogFileTest : public testing::Test {
 protected:
  void SetUp() override {
    folder_ = fs::temp_directory_path() / ("stanchion-log-" + std::to_string(::getpid()) + "-" +
                                           testing::UnitTest::GetInstance()->current_test_info()->name());
    fs::create_directories(folder_);
  }
  void TearDown() override { fs::remove_all(folder_); }

  LogOptions options(bool json) const {
    LogOptions made;
    made.path = (folder_ / "run.log").string();
    made.json = json;
    return made;
  }

  static std::vector<std::string> lines_of(const fs::path& path) {
    std::vector<std::string> lines;
    std::ifstream file(path);
    for (std::string line; std::getline(file, line);) lines.push_back(line);
    return lines;
  }

  fs::path folder_;
};

TEST_F(LogFileTest, EachLineIsAnObjectWhateverTheTextHolds) {
  const std::string odd = "a \"name\"\nin two lines \\ {} %v \xff\x01 \xc3\xa4";
  {
    const auto log = LogFile::open(options(true));
    ASSERT_TRUE(log.ok());
    log->record({"job-ended", odd, "span 1\n", LogLevel::kWarning});
    log->record({"listening", "here"});
  }
  const auto lines = lines_of(folder_ / "run.log");
  ASSERT_EQ(lines.size(), 2U);
  const auto first = nlohmann::json::parse(lines[0]), second = nlohmann::json::parse(lines[1]);
  EXPECT_EQ(first["event"], "job-ended");
  EXPECT_EQ(first["level"], "warning");
  EXPECT_EQ(first["job"], "span 1\n");
  EXPECT_EQ(first["message"], "a \"name\"\nin two lines \\ {} %v \xef\xbf\xbd\x01 \xc3\xa4");
  EXPECT_FALSE(second.contains("job"));
  EXPECT_TRUE(std::regex_match(first["time"].get<std::string>(),
                               std::regex(R"(\d{4}-\d\d-\d\dT\d\d:\d\d:\d\d\.\d{3}Z)")));
}

TEST_F(LogFileTest, ATextIsOneLineAndNoPattern) {
  {
    const auto log = LogFile::open(options(false));
    ASSERT_TRUE(log.ok());
    log->record({"job-ended", "one\n2026-01-01T00:00:00.000 two {} %v", "a1", LogLevel::kError});
  }
  const auto lines = lines_of(folder_ / "run.log");
  ASSERT_EQ(lines.size(), 1U);
  EXPECT_EQ(lines[0].substr(24), "error: a1: one 2026-01-01T00:00:00.000 two {} %v");
}

TEST_F(LogFileTest, FilesAreKeptBySizeAndNumber) {
  LogOptions asked = options(true);
  asked.append = true;
  asked.rotate_bytes = 2000;
  asked.kept_files = 2;
  const auto log = LogFile::open(asked);
  ASSERT_TRUE(log.ok());
  std::vector<std::thread> threads;
  for (int thread = 0; thread < 4; ++thread) {
    threads.emplace_back([&log] {
      for (int k = 0; k < 50; ++k) log->record({"job", "number " + std::to_string(k), "a1"});
    });
  }
  for (std::thread& thread : threads) thread.join();
  std::vector<std::string> names;
  for (const auto& entry : fs::directory_iterator(folder_)) {
    names.push_back(entry.path().filename().string());
    EXPECT_LE(entry.file_size(), 2000U);
    for (const std::string& line : lines_of(entry.path())) EXPECT_TRUE(nlohmann::json::accept(line)) << line;
  }
  std::sort(names.begin(), names.end());
  EXPECT_EQ(names, (std::vector<std::string>{"run.1.log", "run.2.log", "run.log"}));
}

TEST_F(LogFileTest, AnEarlierLogIsKeptWhereThatIsAsked) {
  LogOptions asked = options(false);
  for (const bool append : {false, true, false}) {
    asked.append = append;
    const auto log = LogFile::open(asked);
    ASSERT_TRUE(log.ok());
    log->line("once more");
    EXPECT_EQ(lines_of(folder_ / "run.log").size(), append ? 2U : 1U);
  }
}

TEST_F(LogFileTest, NamesAndWordsThatAreRefused) {
  LogOptions asked = options(true);
  asked.path = (folder_ / "none" / "run.log").string();
  EXPECT_EQ(LogFile::open(asked).status().code(), "cannot-write");
  EXPECT_EQ(wants_json_log("xml").status().code(), "bad-word");
  EXPECT_TRUE(*wants_json_log("json"));
  EXPECT_FALSE(*wants_json_log(std::nullopt));
}

}  // namespace
}  // namespace stanchion::cli
