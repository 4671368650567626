#include "engine/second_path.hpp"

#include "dense/kernels.hpp"

namespace stanchion {

Request by_second_path(Request request) {
  request.second_path = true;
  ++request.seed;
  return request;
}

void use_plain_kernels() {
  use_kernels(reference_kernels());
  use_kernels(reference_kernels_of<float>());
}

}  // namespace stanchion
