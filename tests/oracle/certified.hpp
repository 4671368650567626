// One call from a matrix to its certified inertia, for tests that need no files.
#pragma once

#include "inertia/two_offsets.hpp"
#include "support/factored.hpp"

namespace stanchion::test {

inline CertifiedInertia certify(const Prepared& prepared, OffsetOptions options = {}) {
  auto result = certify_by_offsets(prepared.analysis, prepared.shifted(0), options, *prepared.pool);
  EXPECT_TRUE(result.ok()) << result.status().to_string();
  return result.ok() ? std::move(*result) : CertifiedInertia{};
}

}  // namespace stanchion::test
