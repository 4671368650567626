// Elimination orders that were found before, whoever keeps them.
#pragma once

#include <optional>
#include <string>

#include "base/buffer.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

struct KnownOrder {
  Buffer<Index> vertex_at;  ///< vertex eliminated k-th
  Index dissected = 0;      ///< see Elimination
};

/// `key` is a digest of everything that decides the order. What comes back is not trusted: an order that is
/// no permutation is not used, and any permutation gives right answers.
class KnownOrders {
 public:
  virtual ~KnownOrders() = default;

  /// The order kept under `key`, if any. May wait for another process that is finding it.
  virtual std::optional<KnownOrder> find(const std::string& key) = 0;

  /// Keeps an order that find() did not know. Failing to is no failure of the run.
  virtual void keep(const std::string& key, const KnownOrder& order) = 0;

  /// After find() without keep(): nothing will be kept.
  virtual void give_up() = 0;
};

}  // namespace stanchion
