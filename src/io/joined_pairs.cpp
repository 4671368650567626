#include "io/joined_pairs.hpp"

#include <algorithm>

namespace stanchion {

JoinedPairs::JoinedPairs(const std::vector<std::pair<std::size_t, std::size_t>>& pairs, std::size_t nodes)
    : pairs_(pairs), concerned_(nodes, 0) {
  for (const auto& [a, b] : pairs) concerned_[a] = concerned_[b] = 1;
}

void JoinedPairs::add_stiffness(std::size_t a, std::size_t b) {
  const std::pair<std::size_t, std::size_t> pair{std::min(a, b), std::max(a, b)};
  if (a != b && std::binary_search(pairs_.begin(), pairs_.end(), pair)) stiff_.insert(pair);
}

void JoinedPairs::add_constraint(Index multiplier, std::size_t node) {
  acting_.emplace_back(node, multiplier);
}

std::vector<std::pair<std::size_t, std::size_t>> JoinedPairs::apart() {
  std::sort(acting_.begin(), acting_.end());
  const auto first_of = [this](std::size_t node) {
    return std::lower_bound(acting_.begin(), acting_.end(), std::pair<std::size_t, Index>{node, -1});
  };
  const auto tied = [&](std::size_t a, std::size_t b) {
    auto p = first_of(a), q = first_of(b);
    while (p != acting_.end() && q != acting_.end() && p->first == a && q->first == b) {
      if (p->second == q->second) return true;
      p->second < q->second ? ++p : ++q;
    }
    return false;
  };
  std::vector<std::pair<std::size_t, std::size_t>> apart;
  for (const auto& pair : pairs_) {
    if (stiff_.count(pair) == 0 && !tied(pair.first, pair.second)) apart.push_back(pair);
  }
  return apart;
}

}  // namespace stanchion
