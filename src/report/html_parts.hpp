// The parts of the HTML page, one function a section; html.cpp puts them in order.
#pragma once

#include <string>

#include "report/page.hpp"
#include "stanchion/outcome.hpp"

namespace stanchion {

/// A section with its heading in the margin; nothing for an empty body.
std::string band(const std::string& heading, const std::string& body);

/// Blocks [begin, end) of a page: rows as a definition list, tables (called `name`), bullets and sentences.
std::string blocks_to_html(const std::string& name, const std::vector<Page::Block>& blocks, std::size_t begin,
                           std::size_t end);

/// One article a cause, with its drawings.
std::string causes_to_html(const LocateOutcome& located);

/// Connected parts, mass, local accuracy with histogram and field: one band each.
std::string parts_to_html(const LocateOutcome& located);
std::string mass_to_html(const LocateOutcome& located);
std::string accuracy_to_html(const LocateOutcome& located);

}  // namespace stanchion
