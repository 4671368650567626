#include <gtest/gtest.h>

#include "matrices.hpp"

namespace stanchion {
namespace {

using testing::find_warning;
using testing::read_text;

const std::string kSymmetric = "%%MatrixMarket matrix coordinate real symmetric\n";
const std::string kGeneral = "%%MatrixMarket matrix coordinate real general\n";

void expect_refused(const std::string& text, const char* code, const char* place,
                    const MatrixReadOptions& options = {}) {
  const auto file = read_text(text, options);
  ASSERT_FALSE(file.ok()) << text;
  EXPECT_EQ(file.status().code(), code) << file.status().to_string();
  EXPECT_EQ(file.status().place(), place) << file.status().to_string();
  EXPECT_FALSE(file.status().remedy().empty());
}

TEST(MatrixMarket, ReadsTheExampleOfTheContract) {
  const auto file = read_text(
      kSymmetric + "% 4 1 0 / 1 5 2 / 0 2 6\n\n3 3 5\n1 1 4\r\n 2 1 1.0\n2 2 5\n\n% between\n3 2 2\n3 3 6\n");
  ASSERT_TRUE(file.ok()) << file.status().to_string();
  EXPECT_TRUE(
      testing::same(file->matrix, from_triplets(3, {{0, 0, 4}, {1, 0, 1}, {1, 1, 5}, {2, 1, 2}, {2, 2, 6}})));
  EXPECT_TRUE(file->warnings.empty());
  EXPECT_EQ(file->facts.entries_read, 5);
  EXPECT_EQ(file->facts.storage, Storage::kLowerTriangle);
  EXPECT_EQ(file->sha256.size(), 64U);
}

TEST(MatrixMarket, RefusesOtherKindsByName) {
  const auto header = [](const char* words) {
    return "%%MatrixMarket matrix " + std::string(words) + "\n1 1 1\n1 1 1\n";
  };
  expect_refused(header("coordinate pattern symmetric"), "pattern-matrix", "k.mtx:1");
  expect_refused(header("coordinate complex symmetric"), "complex-matrix", "k.mtx:1");
  expect_refused(header("coordinate real hermitian"), "hermitian-matrix", "k.mtx:1");
  expect_refused(header("coordinate real skew-symmetric"), "skew-symmetric", "k.mtx:1");
  expect_refused(header("array real general"), "array-format", "k.mtx:1");
  expect_refused(header("coordinate real"), "bad-header", "k.mtx:1");
  expect_refused(header("coordinate strange symmetric"), "bad-header", "k.mtx:1");
  expect_refused("%%MatrixMarket vector coordinate real symmetric\n", "bad-header", "k.mtx:1");
}

TEST(MatrixMarket, AMisspeltHeaderIsNotReadAsTriplets) {
  const std::string body = " matrix coordinate real symmetric\n2 2 2\n1 1 4\n2 2 5\n";
  for (const char* start : {"%MatrixMarket", "%% MatrixMarket", " %%MatrixMarket", "MatrixMarket",
                            "#MatrixMarket", "%%%matrixmarket"}) {
    expect_refused(start + body, "bad-header", "k.mtx:1");
  }
  expect_refused("% a comment first\n%%MatrixMarket" + body, "bad-header", "k.mtx:2");
}

TEST(MatrixMarket, RefusesBadSizes) {
  expect_refused(kSymmetric + "2 3 1\n1 1 1\n", "not-square", "k.mtx:2");
  expect_refused(kSymmetric + "0 0 0\n", "empty-matrix", "k.mtx:2");
  expect_refused(kSymmetric + "2 2\n1 1 1\n", "bad-size-line", "k.mtx:2");
  expect_refused(kSymmetric + "2 2 1 7\n1 1 1\n", "bad-size-line", "k.mtx:2");
  expect_refused(kSymmetric + "-2 -2 1\n1 1 1\n", "bad-size-line", "k.mtx:2");
  expect_refused(kSymmetric + "4000000000 4000000000 1\n1 1 1\n", "too-many-rows", "k.mtx:2");
  expect_refused(kSymmetric, "truncated-file", "k.mtx:1");
  expect_refused(kSymmetric + "2 2 3\n1 1 1\n2 2 1", "truncated-file", "k.mtx:4");
  expect_refused(kSymmetric + "2 2 3\n1 1 1\n2 2 1\n", "wrong-count", "k.mtx:4");
  expect_refused(kSymmetric + "2 2 1\n1 1 1\n2 2 1\n", "wrong-count", "k.mtx:4");
}

TEST(MatrixMarket, NamesTheLineOfABadEntry) {
  expect_refused(kSymmetric + "2 2 2\n1 1 1\n0 2 1\n", "index-out-of-range", "k.mtx:4");
  expect_refused(kSymmetric + "2 2 2\n1 1 1\n2 3 1\n", "index-out-of-range", "k.mtx:4");
  expect_refused(kSymmetric + "2 2 2\n1 1 1\n2 -1 1\n", "index-out-of-range", "k.mtx:4");
  expect_refused(kSymmetric + "2 2 2\n1 1 1\n2 99999999999999999999 1\n", "index-out-of-range", "k.mtx:4");
  expect_refused(kSymmetric + "2 2 2\n1 1 1\n2.0 2 1\n", "bad-number", "k.mtx:4");
  expect_refused(kSymmetric + "2 2 2\n1 1\n2 2 1\n", "missing-field", "k.mtx:3");
  expect_refused(kSymmetric + "2 2 2\n1 1 1 1\n2 2 1\n", "extra-text", "k.mtx:3");
  expect_refused(kSymmetric + "2 2 2\n1 1 1\n2 2 1e999\n", "number-overflow", "k.mtx:4");
  expect_refused(kSymmetric + "2 2 2\n1 1 1\n2 2 1e-999\n", "number-underflow", "k.mtx:4");
  expect_refused(kSymmetric + "2 2 2\n1 1 1\n2 2 inf\n", "not-finite", "k.mtx:4");
}

TEST(MatrixMarket, DuplicatesAreAddedInFileOrderAndNamed) {
  const auto file = read_text(kSymmetric + "2 2 5\n2 2 1e16\n1 1 1\n2 2 1\n2 1 3\n2 2 -1e16\n");
  ASSERT_TRUE(file.ok());
  EXPECT_EQ(file->matrix.value[2], (1e16 + 1) - 1e16);
  EXPECT_EQ(file->facts.duplicates, 2);
  const Warning* warning = find_warning(file->warnings, "duplicate-entries");
  ASSERT_NE(warning, nullptr);
  EXPECT_NE(warning->message.find("lines 3 and 5"), std::string::npos) << warning->message;
  EXPECT_EQ(warning->place, "k.mtx, row 2, column 2");
}

TEST(MatrixMarket, SumsThatOverflowAreRefused) {
  expect_refused(kSymmetric + "1 1 2\n1 1 1.7e308\n1 1 1.7e308\n", "sum-overflows", "k.mtx, row 1, column 1");
}

TEST(MatrixMarket, UpperAndMixedTrianglesOfASymmetricFile) {
  const auto lower = read_text(kSymmetric + "2 2 3\n1 1 4\n2 1 7\n2 2 5\n");
  const auto upper = read_text(kSymmetric + "2 2 3\n1 1 4\n1 2 7\n2 2 5\n");
  const auto both = read_text(kSymmetric + "2 2 4\n1 1 4\n1 2 7\n2 1 7\n2 2 5\n");
  ASSERT_TRUE(lower.ok() && upper.ok() && both.ok());
  EXPECT_TRUE(testing::same(lower->matrix, upper->matrix));
  EXPECT_TRUE(testing::same(lower->matrix, both->matrix));
  EXPECT_NE(find_warning(upper->warnings, "upper-triangle"), nullptr);
  EXPECT_NE(find_warning(both->warnings, "both-triangles"), nullptr);
  const auto mixed = read_text(kSymmetric + "3 3 2\n2 1 7\n1 3 8\n");
  ASSERT_TRUE(mixed.ok());
  EXPECT_NE(find_warning(mixed->warnings, "mixed-triangles"), nullptr);
  expect_refused(kSymmetric + "2 2 2\n1 2 7\n2 1 6\n", "asymmetric", "k.mtx, row 2, column 1");
}

TEST(MatrixMarket, GeneralFilesMustBeSymmetric) {
  const std::string even = kGeneral + "2 2 4\n1 1 4\n1 2 7\n2 1 7\n2 2 5\n";
  const auto file = read_text(even);
  ASSERT_TRUE(file.ok());
  EXPECT_TRUE(file->warnings.empty());
  EXPECT_EQ(file->facts.storage, Storage::kBothTriangles);
  EXPECT_EQ(file->matrix.entries(), 3);
  // The second pair differs more than the first.
  const std::string odd = kGeneral + "3 3 5\n1 2 7\n2 1 6.5\n1 3 2\n3 1 4\n3 3 1\n";
  expect_refused(odd, "asymmetric", "k.mtx, row 3, column 1");
  MatrixReadOptions options;
  options.symmetric_part = true;
  const auto part = read_text(odd, options);
  ASSERT_TRUE(part.ok());
  EXPECT_EQ(part->facts.largest_asymmetry, 2);
  EXPECT_EQ(part->matrix.value[0], 6.75);
  EXPECT_EQ(part->matrix.value[1], 3);
  EXPECT_NE(find_warning(part->warnings, "symmetric-part"), nullptr);
}

TEST(MatrixMarket, AnAbsentMirrorImageCountsAsZero) {
  expect_refused(kGeneral + "3 3 3\n1 2 7\n2 1 7\n3 1 2\n", "asymmetric", "k.mtx, row 3, column 1");
  const auto zero = read_text(kGeneral + "3 3 3\n1 2 7\n2 1 7\n3 1 0\n");
  ASSERT_TRUE(zero.ok()) << zero.status().to_string();
  const auto one = read_text(kGeneral + "2 2 2\n1 1 1\n2 1 7\n");
  ASSERT_TRUE(one.ok());
  EXPECT_NE(find_warning(one->warnings, "lower-triangle"), nullptr);
  EXPECT_EQ(one->matrix.value[1], 7);
}

TEST(MatrixMarket, WithAMapNodesAndDofsAreNamed) {
  DofMap map;
  map.append(10, "ux");
  map.append(20, "rz");
  MatrixReadOptions options;
  options.dofs = &map;
  const auto names = [](const Status& status, const char* words) {
    EXPECT_NE(status.message().find(words), std::string::npos) << status.message();
  };
  names(read_text(kGeneral + "2 2 2\n2 1 5\n1 2 4\n", options).status(), "(node 20, rz with node 10, ux)");
  names(read_text(kGeneral + "2 2 1\n2 2 nan\n", options).status(), "(node 20, rz)");
  names(read_text(kGeneral + "2 2 2\n1 1 1e308\n1 1 1e308\n", options).status(), "(node 10, ux)");
  const auto file = read_text(kGeneral + "2 2 2\n1 1 5\n1 1 4\n", options);
  ASSERT_TRUE(file.ok());
  EXPECT_NE(file->warnings.at(0).message.find("(node 10, ux) (lines 3 and 4)"), std::string::npos)
      << file->warnings[0].message;
}

TEST(MatrixMarket, AnArrayIsADiagonalMassOnly) {
  MatrixReadOptions mass;
  mass.role = MatrixRole::kMass;
  const std::string array = "%%MatrixMarket matrix array real general\n3 1\n1\n0\n2.5\n";
  const auto file = read_text(array, mass);
  ASSERT_TRUE(file.ok()) << file.status().to_string();
  EXPECT_TRUE(testing::same(file->matrix, from_triplets(3, {{0, 0, 1}, {1, 1, 0}, {2, 2, 2.5}})));
  expect_refused(array, "array-format", "k.mtx:1");
  expect_refused("%%MatrixMarket matrix array real general\n3 1\n1\n0\n", "truncated-file", "k.mtx:4", mass);
  const auto column = read_text("# tonnes\nmass\n1\n0\n2.5\n", mass);
  ASSERT_TRUE(column.ok()) << column.status().to_string();
  EXPECT_TRUE(testing::same(file->matrix, column->matrix));
}

TEST(MatrixMarket, AFinalLineWithoutLineEndIsSuspicious) {
  const auto file = read_text(kSymmetric + "1 1 1\n1 1 4");
  ASSERT_TRUE(file.ok());
  EXPECT_NE(find_warning(file->warnings, "unfinished-line"), nullptr);
}

TEST(MatrixMarket, AnnouncedSizesDoNotReserveMemoryBeyondTheLimit) {
  MatrixReadOptions options;
  options.memory_limit_bytes = 1 << 20;
  const auto file = read_text(kSymmetric + "2000000000 2000000000 1\n1 1 1\n", options);
  ASSERT_FALSE(file.ok());
  EXPECT_EQ(file.status().code(), "memory-limit");
  EXPECT_EQ(file.status().kind(), StatusKind::kResourceLimit);
}

}  // namespace
}  // namespace stanchion
