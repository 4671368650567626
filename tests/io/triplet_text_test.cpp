#include <gtest/gtest.h>

#include "matrices.hpp"

namespace stanchion {
namespace {

using testing::find_warning;
using testing::read_text;

TEST(TripletText, SeparatorsAndHeaderLinesAreFound) {
  const auto wanted = from_triplets(2, {{0, 0, 4}, {1, 0, -1}, {1, 1, 5}});
  for (const char* text :
       {"1 1 4\n2 1 -1\n2 2 5\n", "1,1,4\n2,1,-1\n2,2,5\n", "row;col;value\n1;1;4\n2;1;-1\n2;2;5\n",
        "# comment\nI\tJ\tK\n1\t1\t4\n2\t1\t-1\n2\t2\t5\n",
        "\xef\xbb\xbf\"row\", \"col\", \"value\"\r\n1, 1, 4\r\n2, 1, -1\r\n2, 2, 5\r\n",
        "0 0 4\n1 0 -1\n1 1 5\n"}) {
    const auto file = read_text(text);
    ASSERT_TRUE(file.ok()) << text << file.status().to_string();
    EXPECT_TRUE(testing::same(file->matrix, wanted)) << text;
  }
}

TEST(TripletText, TheBaseIsDecidedOrRefused) {
  const auto code = [](const char* text, std::optional<int> base, std::optional<Index> rows) {
    MatrixReadOptions options;
    options.base = base;
    options.rows = rows;
    const auto file = read_text(text, options);
    return file.ok()
               ? std::to_string(file->matrix.rows) + " rows, first " + std::to_string(file->matrix.row[0])
               : file.status().code();
  };
  const char* from_one = "1 1 4\n3 3 5\n";
  EXPECT_EQ(code(from_one, {}, {}), "3 rows, first 0");
  EXPECT_EQ(code(from_one, 0, {}), "4 rows, first 1");
  EXPECT_EQ(code(from_one, {}, 3), "3 rows, first 0");
  EXPECT_EQ(code(from_one, {}, 4), "ambiguous-base");
  EXPECT_EQ(code(from_one, 1, 4), "4 rows, first 0");
  EXPECT_EQ(code(from_one, {}, 2), "index-out-of-range");
  EXPECT_EQ(code("2 2 4\n3 3 5\n", {}, {}), "ambiguous-base");
  EXPECT_EQ(code("0 0 4\n3 3 5\n", {}, {}), "4 rows, first 0");
  EXPECT_EQ(code("0 0 4\n3 3 5\n", {}, 3), "index-out-of-range");
  EXPECT_EQ(code("0 0 4\n3 3 5\n", 1, {}), "index-out-of-range");
  EXPECT_EQ(code("0 0 4\n", 2, {}), "bad-base");
}

TEST(TripletText, UpperEntriesAreShiftedWithTheRest) {
  const auto file = read_text("1 1 4\n1 3 -1\n3 1 -1\n2 3 2\n3 2 2\n3 3 5\n");
  ASSERT_TRUE(file.ok()) << file.status().to_string();
  EXPECT_TRUE(testing::same(file->matrix, from_triplets(3, {{0, 0, 4}, {2, 0, -1}, {2, 1, 2}, {2, 2, 5}})));
}

TEST(TripletText, OtherTextIsRefusedWithItsFirstLine) {
  const auto file = read_text("# greeting\nhello there\n");
  ASSERT_FALSE(file.ok());
  EXPECT_EQ(file.status().code(), "unknown-format");
  EXPECT_EQ(file.status().place(), "k.mtx:2");
  EXPECT_EQ(read_text("").status().code(), "empty-file");
  EXPECT_EQ(read_text("\n\n# only\n").status().code(), "empty-file");
  EXPECT_EQ(read_text(std::string("\1\0\2\3", 4)).status().code(), "unknown-format");
  EXPECT_EQ(read_text("1.5\n2.5\n").status().code(), "one-column");
}

TEST(NodeKeyed, NumberedInOrderOfAppearance) {
  const auto file = read_text("node,dof,node,dof,value\n7,ux,7,ux,4\n7,UX,9,temp,-1\n9,temp,9,temp,5\n");
  ASSERT_TRUE(file.ok()) << file.status().to_string();
  EXPECT_TRUE(testing::same(file->matrix, from_triplets(2, {{0, 0, 4}, {1, 0, -1}, {1, 1, 5}})));
  ASSERT_TRUE(file->dofs.has_value());
  EXPECT_EQ(file->dofs->equations(), 2);
  EXPECT_EQ(file->dofs->describe(1), "node 9, temp");
}

TEST(NodeKeyed, NumberedByTheMap) {
  DofMap map;
  map.append(9, "ux");
  map.append(7, "ux");
  map.append(7, "uy");
  MatrixReadOptions options;
  options.dofs = &map;
  const auto file = read_text("7 ux 7 ux 4\n7 ux 9 UX -1\n7 ux 9 ux -1\n9 ux 9 ux 5\n", options);
  ASSERT_TRUE(file.ok()) << file.status().to_string();
  EXPECT_TRUE(testing::same(file->matrix, from_triplets(3, {{0, 0, 5}, {1, 0, -2}, {1, 1, 4}})));
  EXPECT_FALSE(file->dofs.has_value());
  const Warning* warning = find_warning(file->warnings, "duplicate-entries");
  ASSERT_NE(warning, nullptr);
  EXPECT_NE(warning->message.find("lines 2 and 3"), std::string::npos) << warning->message;
  const auto unknown = read_text("7 ux 7 ux 4\n7 ux 8 ux 4\n", options);
  ASSERT_FALSE(unknown.ok());
  EXPECT_EQ(unknown.status().code(), "unknown-dof");
  EXPECT_EQ(unknown.status().place(), "k.mtx:2");
}

}  // namespace
}  // namespace stanchion
