// Name and version of the program, as every document states them. The number is written once, in
// CMakeLists.txt.
#pragma once

namespace stanchion {

const char* program_name();
const char* program_version();

}  // namespace stanchion
