// The machine's own rate: C -= A B^T of the shapes a large front has, by the BLAS at hand.
#include <algorithm>
#include <cstdio>
#include <cstdlib>
#include <nlohmann/json.hpp>
#include <thread>
#include <vector>

#include "base/clock.hpp"
#include "bench/blas_threads.hpp"
#include "dense/blas.hpp"

namespace {

using stanchion::Index;
using Vector = std::vector<double>;

struct Product {
  Index n, k;
  Vector a, b, c;

  Product(Index order, Index depth)
      : n(order),
        k(depth),
        a(area(order, depth), 1e-3),
        b(area(order, depth), 1e-3),
        c(area(order, order), 0.0) {}
  static std::size_t area(Index rows, Index columns) {
    return static_cast<std::size_t>(rows) * static_cast<std::size_t>(columns);
  }
  void multiply() { stanchion::gemm_nt(n, n, k, -1.0, a.data(), n, b.data(), n, 1.0, c.data(), n); }
  double flops() const { return 2.0 * n * n * k; }
};

/// Best GFLOP/s of `repetitions` over all of `workers` together, each with its own product.
double best_rate(int workers, Index n, Index k, int repetitions) {
  std::vector<Product> products(static_cast<std::size_t>(workers), Product(n, k));
  double best = 0;
  for (int r = 0; r <= repetitions; ++r) {
    const stanchion::Stopwatch watch;
    std::vector<std::thread> others;
    for (std::size_t w = 1; w < products.size(); ++w) others.emplace_back([&, w] { products[w].multiply(); });
    products[0].multiply();
    for (auto& other : others) other.join();
    const double rate = workers * products[0].flops() / watch.seconds() * 1e-9;
    if (r > 0) best = std::max(best, rate);  // the first round touches the memory
  }
  return best;
}

}  // namespace

/// bench_dgemm [n [k [repetitions]]]
int main(int argc, char** argv) {
  const Index n = argc > 1 ? std::atoi(argv[1]) : 2048;
  const Index k = argc > 2 ? std::atoi(argv[2]) : 256;
  const int repetitions = argc > 3 ? std::atoi(argv[3]) : 7;
  if (n < 1 || k < 1 || repetitions < 1) {
    std::fprintf(stderr, "usage: bench_dgemm [n [k [repetitions]]]\n");
    return 2;
  }
  nlohmann::ordered_json line;
  line["program"] = "dgemm";
  line["n"] = n;
  line["k"] = k;
  line["blas"] = stanchion::blas_description();
  openblas_set_num_threads(1);
  line["gflops_one_thread"] = best_rate(1, n, k, repetitions);
  line["gflops_two_workers"] = best_rate(2, n, k, repetitions);
  openblas_set_num_threads(2);
  line["gflops_two_blas_threads"] = best_rate(1, n, k, repetitions);
  std::printf("%s\n", line.dump().c_str());
  return 0;
}
