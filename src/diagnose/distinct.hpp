// Lists in ascending order in which nothing stands twice.
#pragma once

#include <algorithm>
#include <vector>

namespace stanchion {

/// Sorts `list` and keeps one of each.
template <class T>
void make_distinct(std::vector<T>& list) {
  std::sort(list.begin(), list.end());
  list.erase(std::unique(list.begin(), list.end()), list.end());
}

}  // namespace stanchion
