#include <gtest/gtest.h>

#include "io/write_matrix.hpp"
#include "matrices.hpp"
#include "temp_folder.hpp"

namespace stanchion {
namespace {

const std::string kValid = std::string(STANCHION_DATA) + "/examples/hdf5/valid.h5";

TEST(Hdf5, TheGroupMayBeNamed) {
  ThreadPool pool(1);
  EXPECT_TRUE(read_matrix(kValid, {}, pool).ok());
  EXPECT_TRUE(read_matrix(kValid + ":/stiffness", {}, pool).ok());
  const auto wrong = read_matrix(kValid + ":/mass", {}, pool);
  ASSERT_FALSE(wrong.ok());
  EXPECT_EQ(wrong.status().code(), "no-matrix-group");
  EXPECT_EQ(read_matrix("/no/such.h5:/mass", {}, pool).status().code(), "file-not-found");
  const std::string other = std::string(STANCHION_DATA) + "/examples/matrix_market/valid.mtx:/mass";
  EXPECT_EQ(read_matrix(other, {}, pool).status().code(), "not-hdf5");
}

TEST(Hdf5, AmongSeveralGroupsOneMustBeNamed) {
  const std::string path = std::string(STANCHION_TEST_FILES) + "/two_groups.h5";
  ThreadPool pool(1);
  const auto any = read_matrix(path, {}, pool);
  ASSERT_FALSE(any.ok());
  EXPECT_EQ(any.status().code(), "several-groups");
  const auto whole = read_matrix(path + ":/k", {}, pool), real = read_matrix(path + ":/g", {}, pool);
  ASSERT_TRUE(whole.ok()) << whole.status().to_string();
  ASSERT_TRUE(real.ok()) << real.status().to_string();
  EXPECT_TRUE(testing::same(whole->matrix, from_triplets(2, {{0, 0, 4}, {1, 0, -1}, {1, 1, 5}})));
  EXPECT_TRUE(testing::same(whole->matrix, real->matrix));
  EXPECT_EQ(whole->format, "HDF5 group, csc");
  EXPECT_EQ(real->format, "HDF5 group, by rows or columns");
  EXPECT_EQ(read_matrix(path + ":/bsr", {}, pool).status().code(), "unsupported-format");
  EXPECT_EQ(read_matrix(path + ":/rounds", {}, pool).status().code(), "integer-rounds");
}

TEST(Hdf5, DataInOtherFilesAreNotFollowed) {
  ThreadPool pool(1);
  EXPECT_EQ(read_matrix(std::string(STANCHION_TEST_FILES) + "/external.h5", {}, pool).status().code(),
            "external-data");
}

TEST(Hdf5, OwnFilesSayTheirFormatAndSize) {
  const testing::TempFolder folder;
  ThreadPool pool(1);
  const auto matrix = testing::scattered(30, 3, 4);
  ASSERT_TRUE(write_matrix(matrix, folder.path("k.h5")).ok());
  const auto file = read_matrix(folder.path("k.h5"), {}, pool);
  ASSERT_TRUE(file.ok()) << file.status().to_string();
  EXPECT_EQ(file->format, "HDF5 group, csr");
  EXPECT_EQ(file->sha256.size(), 64U);
  MatrixReadOptions options;
  options.memory_limit_bytes = 1000;
  EXPECT_EQ(read_matrix(folder.path("k.h5"), options, pool).status().code(), "memory-limit");
}

TEST(Hdf5, BytesInMemoryAndCompressedFilesAreRefused) {
  const auto file = testing::read_text(testing::file_bytes(kValid));
  ASSERT_FALSE(file.ok());
  EXPECT_EQ(file.status().code(), "compressed-hdf5");
}

}  // namespace
}  // namespace stanchion
