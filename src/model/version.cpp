#include "model/version.hpp"

namespace stanchion {

const char* program_name() {
  return "stanchion";
}

const char* program_version() {
  return STANCHION_VERSION;
}

}  // namespace stanchion
