// METIS draws from srand() and rand(), whose one state the whole process shares. A program that links this
// file gives each thread a state of its own, so that METIS runs in several threads at once and still gives
// the same order. The numbers are the C library's own: its generator with the same table, seeded alike.
#include <stdlib.h>

#include <cstdint>

namespace {

struct Generator {
  char table[128] = {};
  random_data data{};
  Generator() { initstate_r(1, table, sizeof table, &data); }
};

Generator& generator() {
  thread_local Generator of_this_thread;
  return of_this_thread;
}

}  // namespace

extern "C" void srand(unsigned seed) noexcept {
  srandom_r(seed, &generator().data);
}

extern "C" int rand() noexcept {
  std::int32_t number = 0;
  random_r(&generator().data, &number);
  return number;
}
