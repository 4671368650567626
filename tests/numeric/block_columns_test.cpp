// Sums over the columns of blocks against sums in higher precision, and their bits for several numbers of
// threads.
#include "numeric/block_columns.hpp"

#include <gtest/gtest.h>

#include <cmath>
#include <vector>

#include "support/generators.hpp"

namespace stanchion {
namespace {

TEST(BlockColumns, DotsAndNormsAreThoseOfEachColumn) {
  constexpr auto kV = static_cast<std::size_t>(kBlockVectors);
  for (const Offset rows : {Offset{0}, Offset{1}, kBlockRowsAPiece, kBlockRowsAPiece + 1, Offset{30'011}}) {
    SCOPED_TRACE(rows);
    test::Random random(7);
    std::vector<double> a(static_cast<std::size_t>(rows) * kV), b(a.size());
    for (double& x : a) x = test::uniform(random, -1, 1);
    for (double& x : b) x = test::uniform(random, -1, 1);
    std::array<long double, kV> dots{}, squares{}, sizes{};
    for (std::size_t i = 0; i < a.size(); ++i) {
      const long double product = static_cast<long double>(a[i]) * static_cast<long double>(b[i]);
      dots[i % kV] += product;
      sizes[i % kV] += std::fabs(product);
      squares[i % kV] += static_cast<long double>(a[i]) * static_cast<long double>(a[i]);
    }
    ThreadPool one(1), three(3);
    const ColumnSums found = column_dots(a.data(), b.data(), rows, one);
    const ColumnSums norms = column_norms(a.data(), rows, one);
    for (std::size_t v = 0; v < kV; ++v) {
      EXPECT_LE(std::fabs(static_cast<double>(static_cast<long double>(found[v]) - dots[v])),
                static_cast<double>(rows) * 0x1p-53 * static_cast<double>(sizes[v]));
      const double norm = static_cast<double>(std::sqrt(squares[v]));
      EXPECT_GE(norms[v], norm);
      EXPECT_LE(norms[v], norm * (1 + 2e-6));
    }
    EXPECT_EQ(column_dots(a.data(), b.data(), rows, three), found);
    EXPECT_EQ(column_norms(a.data(), rows, three), norms);
  }
}

}  // namespace
}  // namespace stanchion
