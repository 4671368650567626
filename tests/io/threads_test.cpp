// Results and error messages do not depend on the number of threads.
#include <gtest/gtest.h>

#include "io/shortest.hpp"
#include "matrices.hpp"

namespace stanchion {
namespace {

/// Several megabytes of unsorted general entries with duplicates; piece boundaries fall inside.
std::string long_text(Index rows, bool general) {
  const auto matrix = testing::scattered(rows, 40, 7);
  std::vector<std::string> lines;
  for (Index column = 0; column < rows; ++column) {
    for (Offset k = matrix.column_start[column]; k < matrix.column_start[Offset{column} + 1]; ++k) {
      const std::string value = number_text(matrix.value[k]);
      const std::string row = std::to_string(matrix.row[k] + 1), col = std::to_string(column + 1);
      lines.push_back(row + " " + col + " " + value + "\n");
      if (general && row != col) lines.push_back(col + " " + row + " " + value + "\n");
      if (row == col)
        lines.push_back(row + " " + col + " 0.1\n"), lines.push_back(row + " " + col + " 1e-17\n");
    }
  }
  std::shuffle(lines.begin(), lines.end(), std::mt19937(3));
  std::string text = std::string("%%MatrixMarket matrix coordinate real ") +
                     (general ? "general" : "symmetric") + "\n" + std::to_string(rows) + " " +
                     std::to_string(rows) + " " + std::to_string(lines.size()) + "\n";
  for (const std::string& line : lines) text += line;
  return text;
}

TEST(Threads, TheMatrixIsTheSameForAnyNumber) {
  for (const bool general : {false, true}) {
    const std::string text = long_text(6000, general);
    ASSERT_GT(text.size(), std::size_t{6} << 20);
    const auto one = testing::read_text(text, {}, 1);
    ASSERT_TRUE(one.ok()) << one.status().to_string();
    EXPECT_TRUE(check_invariants(one->matrix));
    EXPECT_EQ(one->facts.duplicates, 12000);
    for (const int threads : {2, 3, 8}) {
      const auto many = testing::read_text(text, {}, threads);
      ASSERT_TRUE(many.ok());
      EXPECT_TRUE(testing::same(one->matrix, many->matrix)) << threads;
      ASSERT_EQ(one->warnings.size(), many->warnings.size());
      for (std::size_t i = 0; i < one->warnings.size(); ++i) {
        EXPECT_EQ(one->warnings[i].message, many->warnings[i].message);
      }
    }
  }
}

TEST(Threads, TheFirstBadLineIsNamedWhateverTheNumber) {
  std::string text = long_text(6000, false);
  // Faults in several pieces: only the first counts.
  Offset line = 0, first = 0;
  for (std::size_t at = 0; at < text.size(); at = text.find('\n', at) + 1) {
    ++line;
    if (at < text.size() / 2 || line % 1000 != 0) continue;
    text[at] = 'x';
    if (first == 0) first = line;
  }
  ASSERT_GT(first, 0);
  for (const int threads : {1, 2, 8}) {
    const auto file = testing::read_text(text, {}, threads);
    ASSERT_FALSE(file.ok());
    EXPECT_EQ(file.status().code(), "bad-number");
    EXPECT_EQ(file.status().place(), "k.mtx:" + std::to_string(first));
  }
}

}  // namespace
}  // namespace stanchion
