#include "numeric/block_kernels.hpp"

#include <string_view>

#include "dense/kernels.hpp"

namespace stanchion {
namespace isa_generic {
extern const BlockKernels block_table;
}
namespace isa_avx2 {
extern const BlockKernels block_table;
}
namespace isa_avx512 {
extern const BlockKernels block_table;
}

const BlockKernels& block_kernels() {
  const std::string_view isa = kernels().isa;
  if (isa == "AVX-512") return isa_avx512::block_table;
  return isa == "AVX2" ? isa_avx2::block_table : isa_generic::block_table;
}

const BlockKernels& reference_block_kernels() {
  return isa_generic::block_table;
}

}  // namespace stanchion
