// Uses nothing but the installed headers and library.
#include <cstdio>

#include "stanchion/stanchion.hpp"

int main(int argc, char** argv) {
  if (argc != 3) return 2;
  stanchion::Request request;
  request.input.stiffness = argv[1];
  const auto checked = stanchion::check(request);
  if (!checked.ok()) {
    std::puts(checked.status().to_string().c_str());
    return 1;
  }
  std::fputs(stanchion::to_text(*checked).c_str(), stdout);

  request.input.geometric = argv[2];
  request.pencil = stanchion::Pencil::kGeometric;
  request.shifts = {2.0};
  const auto counted = stanchion::count(request);
  if (!counted.ok() || !counted->count->counts[0].below) return 1;
  std::printf("%d below 2\n", *counted->count->counts[0].below);
  return 0;
}
