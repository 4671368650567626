#include "report/page.hpp"

#include <gtest/gtest.h>

namespace stanchion {
namespace {

TEST(Page, WrapsAtBlanksAndHangsBesideTheLabel) {
  Page page;
  std::string words;
  for (int k = 0; k < 30; ++k) words += "abcdefg ";
  page.row("label", words);
  const std::string& text = page.text();
  const std::string first = text.substr(0, text.find('\n'));
  EXPECT_EQ(first.substr(0, 23), "  label         abcdefg");
  EXPECT_LE(first.size(), Page::kWidth);
  EXPECT_GT(first.size(), Page::kWidth - 8);
  EXPECT_EQ(text.substr(first.size() + 1, 24), std::string(16, ' ') + "abcdefg ");
}

TEST(Page, ALongWordIsLeftWhole) {
  Page page;
  const std::string path(150, 'p');
  page.bullet(path + " tail");
  EXPECT_EQ(page.text(), "  - " + path + "\n    tail\n");
}

TEST(Page, TableColumnsAreAsWideAsNeeded) {
  Page page;
  page.table({{"shift", "count", "backed by", "counted"}, {"1.5", "123456", "proof", "factors"}}, 2);
  EXPECT_EQ(page.text(), "  shift   count  backed by  counted\n    1.5  123456  proof      factors\n");
}

TEST(Page, NoTrailingBlanks) {
  Page page;
  page.row("label", "");
  page.title("Title");
  page.sentence("One.");
  EXPECT_EQ(page.text(), "  label\n\nTitle\nOne.\n");
}

}  // namespace
}  // namespace stanchion
