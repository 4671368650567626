// Files below the roots, and nothing else.
#include "service/roots.hpp"

#include <gtest/gtest.h>
#include <sys/stat.h>

#include <filesystem>
#include <fstream>

#include "io/temp_folder.hpp"

namespace stanchion::service {
namespace {

namespace fs = std::filesystem;

class RootsTest : public ::testing::Test {
 protected:
  void SetUp() override {
    fs::create_directories(folder_.path("root/sub"));
    std::ofstream(folder_.path("root/sub/K.mtx")) << "inside";
    std::ofstream(folder_.path("secret")) << "outside";
    fs::create_symlink("sub/K.mtx", folder_.path("root/good"));
    fs::create_symlink("../secret", folder_.path("root/up"));
    fs::create_symlink(folder_.path("secret"), folder_.path("root/absolute"));
    fs::create_directory_symlink("..", folder_.path("root/sub/parent"));
    fs::create_directory_symlink("../..", folder_.path("root/sub/out"));
    ASSERT_EQ(::mkfifo(folder_.path("root/pipe").c_str(), 0600), 0);
  }
  Roots open() { return std::move(*Roots::open({"m=" + folder_.path("root")})); }
  stanchion::testing::TempFolder folder_;
};

TEST_F(RootsTest, FilesBelowAreOpened) {
  const Roots roots = open();
  EXPECT_EQ(roots.open_file("m/sub/K.mtx")->bytes, 6);
  EXPECT_EQ(roots.open_file("m/good")->bytes, 6);
  EXPECT_EQ(roots.open_file("m/sub/parent/sub/K.mtx")->bytes, 6);
  EXPECT_EQ(*roots.name_of(folder_.path("root/sub/../sub/K.mtx")), "m/sub/K.mtx");
  EXPECT_EQ(*roots.name_of("m//sub/./K.mtx"), "m/sub/K.mtx");
}

TEST_F(RootsTest, NothingElseIs) {
  const Roots roots = open();
  for (const char* name :
       {"m/up", "m/absolute", "m/sub/out/secret", "m/../secret", "m/sub/../../secret", "x/K", "m2/K"}) {
    const auto opened = roots.open_file(name);
    ASSERT_FALSE(opened.ok()) << name;
    EXPECT_EQ(opened.status().code(), "outside-roots") << name;
  }
  EXPECT_EQ(roots.open_file("m/pipe").status().code(), "not-a-file");
  EXPECT_EQ(roots.open_file("m/sub").status().code(), "not-a-file");
  EXPECT_EQ(roots.open_file("m/none").status().code(), "file-not-found");
  for (const std::string& name :
       {folder_.path("secret"), folder_.path("rootless/x"), std::string("m/../secret"), std::string("m"),
        std::string("m/"), std::string("m/x\0y", 5), std::string("..")}) {
    EXPECT_FALSE(roots.name_of(name).ok()) << name;
  }
}

TEST_F(RootsTest, ListingsLeaveOutWhatLeadsOutside) {
  const Roots roots = open();
  std::vector<std::string> names;
  const auto listing = roots.list("m", 100);
  ASSERT_TRUE(listing.ok());
  for (const FileEntry& entry : listing->entries) names.push_back(entry.name);
  EXPECT_EQ(names, (std::vector<std::string>{"sub", "good"}));
  EXPECT_TRUE(roots.list("m", 1)->truncated);
  EXPECT_EQ(roots.list("", 10)->entries[0].path, "m");
}

TEST_F(RootsTest, NamesOfRootsAreTame) {
  const std::string root = folder_.path("root");
  for (const std::string& text :
       {"a/b=" + root, "=" + root, "a.b=" + root, "uploads=" + root, std::string("m=/nowhere")}) {
    EXPECT_FALSE(Roots::open({text}).ok()) << text;
  }
  EXPECT_FALSE(Roots::open({"m=" + root, "m=" + root}).ok());
  EXPECT_EQ(Roots::open({root})->names(), std::vector<std::string>{"root"});
}

}  // namespace
}  // namespace stanchion::service
