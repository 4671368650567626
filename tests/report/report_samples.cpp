// Prints every sample document, each after a line with its name: food for schema_test.py.
#include <cstdio>

#include "report/json.hpp"
#include "report/samples.hpp"

int main() {
  for (const auto& [name, outcome] : stanchion::samples::all()) {
    std::printf("== %s\n%s", name.c_str(), stanchion::to_json(outcome).c_str());
  }
  return 0;
}
