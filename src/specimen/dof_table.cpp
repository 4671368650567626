#include "specimen/dof_table.hpp"

#include <array>

namespace stanchion::specimen {

const char* dof_name(Dof dof) {
  constexpr std::array<const char*, kDofKinds> kNames{"ux", "uy", "uz", "rx", "ry", "rz", "multiplier", "t"};
  return kNames[static_cast<std::size_t>(dof)];
}

Index DofTable::add_node(const Point& place, DofSet dofs) {
  place_.push_back(place);
  set_.push_back(dofs);
  return static_cast<Index>(set_.size()) - 1;
}

void DofTable::number() {
  first_.resize(set_.size());
  equations_ = 0;
  for (std::size_t node = 0; node < set_.size(); ++node) {
    first_[node] = equations_;
    equations_ += std::popcount(static_cast<unsigned>(set_[node]));
  }
}

}  // namespace stanchion::specimen
