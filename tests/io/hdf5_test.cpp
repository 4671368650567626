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
