// The style of the HTML report: one sheet, light and dark, narrow and wide, screen and paper.
#pragma once

namespace stanchion {

/// CSS. Blue for what moves, orange for where it goes, told apart by line and shape as well as by colour.
extern const char* const kHtmlStyle;

}  // namespace stanchion
