#include "model/option_table.hpp"

#include <algorithm>

namespace stanchion {

const OptionEntry* CommandTable::find_key(const std::string& key) const {
  const auto found = std::find_if(options.begin(), options.end(),
                                  [&key](const OptionEntry& option) { return option.key == key; });
  return found == options.end() ? nullptr : &*found;
}

std::vector<std::string> choices_of(const OptionEntry& option) {
  std::vector<std::string> choices;
  const std::string& words = option.value;
  if (words.find('|') == std::string::npos) return choices;
  for (std::size_t begin = 0; begin <= words.size();) {
    const std::size_t end = std::min(words.find('|', begin), words.size());
    choices.push_back(words.substr(begin, end - begin));
    begin = end + 1;
  }
  return choices;
}

}  // namespace stanchion
