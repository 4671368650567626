// Text inside HTML, SVG and XML.
#pragma once

#include <string>
#include <string_view>

namespace stanchion {

/// & < > " ' as entities; control characters and bytes that are no UTF-8 as the replacement character.
std::string escaped(std::string_view text);

/// The same for running text of an HTML page; numbers with an exponent do not break at its sign.
std::string flowing(std::string_view text);

/// The same for large type, where lines are short: a number stays with the noun it counts ("6 zero
/// directions" keeps "6 zero" together), and "node", "row", "column" or "step" with its number; paths as
/// below.
std::string headline(std::string_view text);

/// A path that may go on in the next line after each folder.
std::string path_to_html(std::string_view path);

}  // namespace stanchion
