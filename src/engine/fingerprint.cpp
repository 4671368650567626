#include "engine/fingerprint.hpp"

#include <cmath>

#include "base/digest.hpp"

namespace stanchion {

std::string equations_fingerprint(const std::vector<Index>& equations) {
  Sha256 digest;
  for (const Index equation : equations) digest.update(std::to_string(Offset{equation} + 1) + "\n");
  return digest.finish();
}

std::string scaling_fingerprint(std::span<const double> scale, std::span<const Index> position_of) {
  Sha256 digest;
  for (const Index position : position_of) {
    digest.update(std::to_string(std::ilogb(scale[static_cast<std::size_t>(position)])) + "\n");
  }
  return digest.finish();
}

}  // namespace stanchion
