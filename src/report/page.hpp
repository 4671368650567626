// A page of plain text, at most 100 columns wide: sentences, labelled rows, bullets and small tables. What
// was put on it stays known block by block, so that other renderings say the same.
#pragma once

#include <string>
#include <vector>

namespace stanchion {

/// Collects text from top to bottom. Every block is wrapped at blanks; a single word longer than the page (a
/// path, say) is left whole.
class Page {
 public:
  static constexpr std::size_t kWidth = 100;

  enum class Kind { kSentence, kTitle, kRow, kBullet, kTable, kBlank };
  struct Block {
    Kind kind = Kind::kBlank;
    std::string label, text;                      ///< of a row; `text` alone for sentences, titles, bullets
    std::vector<std::vector<std::string>> cells;  ///< of a table
    std::size_t to_the_right = 0;
  };

  /// A sentence at the left margin.
  void sentence(const std::string& text);
  /// A line as it is, never wrapped: for pictures, which other renderings draw in their own way. No block.
  void line(const std::string& text);
  /// A section title, set off by an empty line.
  void title(const std::string& text);
  /// "  label          text", the text hanging beside its label.
  void row(const std::string& label, const std::string& text);
  /// "  - text", hanging.
  void bullet(const std::string& text);
  /// Rows of cells in columns as wide as needed, the first `to_the_right` of them set to the right (numbers),
  /// the others to the left; the last one wraps.
  void table(const std::vector<std::vector<std::string>>& rows, std::size_t to_the_right);
  void blank();

  const std::string& text() const { return text_; }
  const std::vector<Block>& blocks() const { return blocks_; }

 private:
  void wrapped(const std::string& lead, const std::string& text);

  std::string text_;
  std::vector<Block> blocks_;
};

}  // namespace stanchion
