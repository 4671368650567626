// Real matrices beside the project, where they exist.
#include <gtest/gtest.h>

#include <filesystem>

#include "io/preflight.hpp"
#include "io/write_matrix.hpp"
#include "matrices.hpp"
#include "temp_folder.hpp"

namespace stanchion {
namespace {

TEST(SharedData, EveryMatrixIsReadAndSurvivesEveryFormat) {
  if (!std::filesystem::is_directory(STANCHION_SHARED_DATA))
    GTEST_SKIP() << "no shared data beside the project";
  const testing::TempFolder folder;
  ThreadPool pool(2);
  int files = 0;
  for (const auto& item : std::filesystem::directory_iterator(STANCHION_SHARED_DATA)) {
    if (item.path().extension() != ".mtx") continue;
    ++files;
    const auto file = read_matrix(item.path().string(), {}, pool);
    ASSERT_TRUE(file.ok()) << file.status().to_string();
    EXPECT_TRUE(check_invariants(file->matrix)) << item.path();
    EXPECT_EQ(file->facts.duplicates, 0) << item.path();
    EXPECT_TRUE(preflight({file->matrix, item.path().string()}).ok());
    for (const char* name : {"k.mtx", "k.rb", "k.npz", "k.h5"}) {
      ASSERT_TRUE(write_matrix(file->matrix, folder.path(name)).ok());
      const auto back = read_matrix(folder.path(name), {}, pool);
      ASSERT_TRUE(back.ok()) << back.status().to_string();
      EXPECT_TRUE(testing::same(file->matrix, back->matrix)) << item.path() << name;
    }
  }
  EXPECT_GT(files, 0);
}

}  // namespace
}  // namespace stanchion
