#include "report/page.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <sstream>

namespace stanchion {
namespace {

constexpr std::size_t kLabelWidth = 14;

}  // namespace

void Page::wrapped(const std::string& lead, const std::string& text) {
  std::istringstream words(text);
  std::string line = lead, word;
  const std::string indent(lead.size(), ' ');
  bool empty = true;  // nothing but the lead or the indent on this line
  while (words >> word) {
    if (!empty && line.size() + 1 + word.size() > kWidth) {
      text_ += line + "\n";
      line = indent;
      empty = true;
    }
    line += (empty ? "" : " ") + word;
    empty = false;
  }
  line.erase(line.find_last_not_of(' ') + 1);
  text_ += line + "\n";
}

void Page::line(const std::string& text) {
  text_ += text.substr(0, text.find_last_not_of(' ') + 1) + "\n";
}

void Page::sentence(const std::string& text) {
  blocks_.push_back({Kind::kSentence, {}, text, {}, 0});
  wrapped("", text);
}

void Page::title(const std::string& text) {
  blank();
  blocks_.push_back({Kind::kTitle, {}, text, {}, 0});
  text_ += text + "\n";
}

void Page::row(const std::string& label, const std::string& text) {
  blocks_.push_back({Kind::kRow, label, text, {}, 0});
  wrapped(fmt::format("  {:<{}}", label, kLabelWidth), text);
}

void Page::bullet(const std::string& text) {
  blocks_.push_back({Kind::kBullet, {}, text, {}, 0});
  wrapped("  - ", text);
}

void Page::table(const std::vector<std::vector<std::string>>& rows, std::size_t to_the_right) {
  blocks_.push_back({Kind::kTable, {}, {}, rows, to_the_right});
  std::vector<std::size_t> widths;
  for (const auto& row : rows) {
    widths.resize(std::max(widths.size(), row.size()), 0);
    for (std::size_t k = 0; k < row.size(); ++k) widths[k] = std::max(widths[k], row[k].size());
  }
  for (const auto& row : rows) {
    std::string lead = " ";
    for (std::size_t k = 0; k + 1 < row.size(); ++k) {
      lead += k < to_the_right ? fmt::format(" {:>{}} ", row[k], widths[k])
                               : fmt::format(" {:<{}} ", row[k], widths[k]);
    }
    wrapped(lead + " ", row.empty() ? "" : row.back());
  }
}

void Page::blank() {
  blocks_.push_back({});
  text_ += "\n";
}

}  // namespace stanchion
