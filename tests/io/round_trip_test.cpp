// Every format written by us reads back with the same bits, and converts into every other.
#include <gtest/gtest.h>

#include "io/convert.hpp"
#include "io/write_matrix.hpp"
#include "matrices.hpp"
#include "temp_folder.hpp"

namespace stanchion {
namespace {

const char* const kNames[] = {"k.mtx", "k.mtx.gz", "k.npz", "k.h5",  "k.hdf5",
                              "k.rb",  "k.csv",    "k.tsv", "k.txt", "k.csv.gz"};

std::vector<SymmetricMatrix> samples() {
  std::vector<SymmetricMatrix> all;
  all.push_back(testing::scattered(60, 4, 1));
  all.push_back(from_triplets(1, {{0, 0, -4.9e-324}}));
  all.push_back(from_triplets(3, {{0, 0, 1.7976931348623157e308}, {2, 0, -0.1}, {2, 2, 1.0 / 3.0}}));
  all.push_back(from_triplets(4, {{0, 0, 1}, {1, 1, 1}, {2, 2, 1}, {3, 3, 1}}));
  return all;
}

TEST(RoundTrip, EveryFormatKeepsEveryBit) {
  const testing::TempFolder folder;
  ThreadPool pool(2);
  for (const auto& matrix : samples()) {
    for (const char* name : kNames) {
      ASSERT_TRUE(write_matrix(matrix, folder.path(name)).ok()) << name;
      const auto file = read_matrix(folder.path(name), {}, pool);
      ASSERT_TRUE(file.ok()) << file.status().to_string();
      EXPECT_TRUE(testing::same(matrix, file->matrix)) << name << " " << matrix.rows;
    }
  }
}

TEST(RoundTrip, EveryFormatConvertsIntoEveryOther) {
  const testing::TempFolder folder, other;
  ThreadPool pool(1);
  const auto matrix = testing::scattered(25, 3, 2);
  for (const char* from : kNames) {
    ASSERT_TRUE(write_matrix(matrix, folder.path(from)).ok());
    for (const char* to : kNames) {
      const auto converted = convert(folder.path(from), other.path(to), {}, pool);
      ASSERT_TRUE(converted.ok()) << converted.status().to_string();
      EXPECT_EQ(converted->rows, 25);
      const auto file = read_matrix(other.path(to), {}, pool);
      ASSERT_TRUE(file.ok()) << file.status().to_string();
      EXPECT_TRUE(testing::same(matrix, file->matrix)) << from << " to " << to;
    }
  }
}

TEST(RoundTrip, EmptyFirstAndLastRowsSurviveInTripletText) {
  const testing::TempFolder folder;
  ThreadPool pool(1);
  const auto matrix = from_triplets(4, {{1, 1, 2}, {2, 1, 3}});
  ASSERT_TRUE(write_matrix(matrix, folder.path("k.csv")).ok());
  const auto file = read_matrix(folder.path("k.csv"), {}, pool);
  ASSERT_TRUE(file.ok()) << file.status().to_string();
  EXPECT_EQ(file->matrix.rows, 4);
  EXPECT_EQ(file->matrix.entries(), 4);
}

TEST(RoundTrip, MatricesWithoutEntries) {
  const testing::TempFolder folder;
  ThreadPool pool(1);
  const auto matrix = from_triplets(3, {});
  for (const char* name : {"k.mtx", "k.npz", "k.h5", "k.rb"}) {
    ASSERT_TRUE(write_matrix(matrix, folder.path(name)).ok()) << name;
    const auto file = read_matrix(folder.path(name), {}, pool);
    ASSERT_TRUE(file.ok()) << name << file.status().to_string();
    EXPECT_TRUE(testing::same(matrix, file->matrix)) << name;
  }
}

TEST(Write, UnknownNamesAndUnwritableFoldersAreRefused) {
  const auto matrix = from_triplets(1, {{0, 0, 1}});
  EXPECT_EQ(write_matrix(matrix, "k.xyz").code(), "unknown-extension");
  EXPECT_EQ(write_matrix(matrix, "k.npz.gz").code(), "unknown-extension");
  const testing::TempFolder folder;
  for (const char* name : {"none/k.mtx", "none/k.h5"}) {
    const Status status = write_matrix(matrix, folder.path(name));
    EXPECT_EQ(status.code(), "cannot-write");
    EXPECT_EQ(status.kind(), StatusKind::kBadUsage);
  }
}

TEST(Write, NothingIsLeftBehindAndAFailedConversionKeepsTheOldFile) {
  const testing::TempFolder folder;
  ThreadPool pool(1);
  const std::string out = folder.write("out.mtx", "precious");
  const std::string in =
      folder.write("in.mtx", "%%MatrixMarket matrix coordinate real symmetric\n1 1 1\n1 1 x\n");
  EXPECT_FALSE(convert(in, out, {}, pool).ok());
  EXPECT_EQ(testing::file_bytes(out), "precious");
  ASSERT_TRUE(write_matrix(from_triplets(1, {{0, 0, 1}}), out).ok());
  const auto files = std::filesystem::directory_iterator(std::filesystem::path(out).parent_path());
  EXPECT_EQ(std::distance(begin(files), end(files)), 2);
}

TEST(Convert, ANodeKeyedNumberingIsKeptOrItsLossReported) {
  const testing::TempFolder folder;
  ThreadPool pool(1);
  const std::string in = folder.write("in.csv", "7,ux,7,ux,4\n7,ux,9,ux,-1\n9,ux,7,ux,-1\n9,ux,9,ux,5\n");
  const auto lost = convert(in, folder.path("k.mtx"), {}, pool);
  ASSERT_TRUE(lost.ok()) << lost.status().to_string();
  EXPECT_NE(testing::find_warning(lost->warnings, "numbering-lost"), nullptr);
  ConvertOptions options;
  options.dofs_out = folder.path("dofs.csv");
  const auto kept = convert(in, folder.path("k.mtx"), options, pool);
  ASSERT_TRUE(kept.ok());
  EXPECT_TRUE(kept->warnings.empty());
  EXPECT_EQ(testing::file_bytes(options.dofs_out), "equation,node,dof\n1,7,ux\n2,9,ux\n");
}

}  // namespace
}  // namespace stanchion
