#include "base/mapped_file.hpp"

#include <gtest/gtest.h>
#include <sys/stat.h>

#include <cstdlib>
#include <filesystem>
#include <fstream>

namespace stanchion {
namespace {

TEST(MappedFile, GivesTheBytesOrTheReason) {
  std::string folder = (std::filesystem::temp_directory_path() / "stanchion-XXXXXX").string();
  ASSERT_NE(::mkdtemp(folder.data()), nullptr);
  std::ofstream(folder + "/full") << "some bytes";
  std::ofstream(folder + "/empty");
  ::mkfifo((folder + "/pipe").c_str(), 0600);
  auto full = MappedFile::open(folder + "/full");
  ASSERT_TRUE(full.ok());
  const MappedFile moved = std::move(*full);
  EXPECT_EQ(moved.bytes(), "some bytes");
  EXPECT_TRUE(MappedFile::open(folder + "/empty")->bytes().empty());
  EXPECT_EQ(MappedFile::open(folder).status().code(), "not-a-file");
  EXPECT_EQ(MappedFile::open(folder + "/pipe").status().code(), "not-a-file");
  EXPECT_EQ(MappedFile::open(folder + "/none").status().code(), "file-not-found");
  std::filesystem::remove_all(folder);
}

}  // namespace
}  // namespace stanchion
