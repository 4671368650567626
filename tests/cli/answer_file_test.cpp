#include "cli/answer_file.hpp"

#include <gtest/gtest.h>
#include <unistd.h>

#include <filesystem>
#include <fstream>
#include <sstream>

namespace stanchion::cli {
namespace {

class AnswerFileTest : public ::testing::Test {
 protected:
  AnswerFileTest()
      : folder_(std::filesystem::temp_directory_path() / ("answer_" + std::to_string(getpid()))) {
    std::filesystem::create_directories(folder_);
  }
  ~AnswerFileTest() override { std::filesystem::remove_all(folder_); }

  std::string path(const std::string& name) const { return (folder_ / name).string(); }

  std::string content(const std::string& name) const {
    std::ostringstream text;
    text << std::ifstream(path(name)).rdbuf();
    return text.str();
  }

  std::ptrdiff_t files() const {
    return std::distance(std::filesystem::directory_iterator(folder_), std::filesystem::directory_iterator());
  }

  std::filesystem::path folder_;
};

TEST_F(AnswerFileTest, AppearsOnCommitOnly) {
  std::ofstream(path("a")) << "older";
  {
    auto file = AnswerFile::open(path("a"));
    ASSERT_TRUE(file.ok());
    EXPECT_EQ(content("a"), "older");
    EXPECT_TRUE(file->commit("newer").ok());
    EXPECT_EQ(content("a"), "newer");
  }
  EXPECT_EQ(files(), 1);
}

TEST_F(AnswerFileTest, WithoutCommitNothingIsLeft) {
  { ASSERT_TRUE(AnswerFile::open(path("a")).ok()); }
  EXPECT_EQ(files(), 0);
}

TEST_F(AnswerFileTest, LinksStayLinksAlsoToFilesThatAreNotThereYet) {
  std::filesystem::create_symlink("b", path("a"));
  auto file = AnswerFile::open(path("a"));
  ASSERT_TRUE(file.ok());
  EXPECT_TRUE(file->commit("text").ok());
  EXPECT_TRUE(std::filesystem::is_symlink(path("a")));
  EXPECT_EQ(content("b"), "text");
}

TEST_F(AnswerFileTest, PlacesThatCannotBeWrittenAreRefused) {
  for (const std::string& place : {path("no/such/folder/a"), folder_.string()}) {
    const auto file = AnswerFile::open(place);
    ASSERT_FALSE(file.ok()) << place;
    EXPECT_EQ(file.status().code(), "cannot-write");
    EXPECT_EQ(file.status().kind(), StatusKind::kBadUsage);
  }
}

TEST_F(AnswerFileTest, DevicesAreWrittenToDirectly) {
  auto full = AnswerFile::open("/dev/full");
  ASSERT_TRUE(full.ok());
  EXPECT_EQ(full->commit("text").code(), "write-failed");
  auto nothing = AnswerFile::open("/dev/null");
  ASSERT_TRUE(nothing.ok());
  EXPECT_TRUE(nothing->commit("text").ok());
  EXPECT_TRUE(std::filesystem::is_character_file("/dev/null"));
}

}  // namespace
}  // namespace stanchion::cli
