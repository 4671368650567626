// The library's own threads: ended as a program starts, and not there again later.
#include <gtest/gtest.h>

#include <cstdlib>
#include <filesystem>
#include <iterator>
#include <thread>
#include <vector>

#include "dense/blas.hpp"

namespace stanchion {
namespace {

std::ptrdiff_t threads_of_this_process() {
  return std::distance(std::filesystem::directory_iterator("/proc/self/task"),
                       std::filesystem::directory_iterator());
}

/// Large enough that OpenBLAS would take several threads: a matrix of ones times its transpose.
bool multiplies_rightly() {
  constexpr Index n = 300;
  const std::vector<double> ones(n * n, 1.0);
  std::vector<double> product(n * n, 0.0);
  gemm_nt(n, n, n, 1, ones.data(), n, ones.data(), n, 0, product.data(), n);
  for (const double entry : product) {
    if (entry != n) return false;
  }
  return true;
}

int end_threads_and_multiply() {
  const bool several = blas_description().find("OpenBLAS") != std::string::npos &&
                       std::thread::hardware_concurrency() > 1 &&
                       std::getenv("OPENBLAS_NUM_THREADS") == nullptr;
  const std::ptrdiff_t before = threads_of_this_process();
  end_blas_threads();
  const std::ptrdiff_t after = threads_of_this_process();
  if (several && after >= before) return 1;
  use_single_threaded_blas(2);
  if (!multiplies_rightly()) return 2;
  return threads_of_this_process() == after ? 0 : 3;
}

TEST(BlasThreads, AreEndedAndStayAway) {
  GTEST_FLAG_SET(death_test_style, "threadsafe");  // in a process of its own, which has no threads of ours
  EXPECT_EXIT(std::_Exit(end_threads_and_multiply()), testing::ExitedWithCode(0), "");
}

}  // namespace
}  // namespace stanchion
