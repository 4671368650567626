// A folder in which elimination orders are found and left: what is costly about the analysis of a pattern,
// shared by processes that know nothing of each other.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "order/known_orders.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// Files are named by the digest of what decides an order, `ab/abcd....order`, appear whole or not at all and
/// carry a digest of their own; a damaged one is passed over and written anew. Their modification time is
/// that of the last use, so that a cleaner may drop those not used for long, at any time. While one process
/// finds an order, others that want the same wait for it (a lock that ends with the process). One thread an
/// object.
class AnalysisStore : public KnownOrders {
 public:
  /// The folder is made when something is kept.
  explicit AnalysisStore(std::string folder) : folder_(std::move(folder)) {}
  AnalysisStore(const AnalysisStore&) = delete;
  AnalysisStore& operator=(const AnalysisStore&) = delete;
  ~AnalysisStore() override { give_up(); }

  std::optional<KnownOrder> find(const std::string& key) override;
  void keep(const std::string& key, const KnownOrder& order) override;
  void give_up() override;

  /// Where the order of `key` lies.
  std::string path_of(const std::string& key) const;

 private:
  std::optional<KnownOrder> read(const std::string& key) const;

  std::string folder_;
  int lock_ = -1;
};

struct StoredOrder {
  std::string key, path;
  std::int64_t bytes = 0, used_ms = 0;  ///< last use, milliseconds since 1970
};

/// The orders in `folder`, the most recently used first; files of other names are nobody's business.
std::vector<StoredOrder> stored_orders(const std::string& folder);

/// Drops orders, the least recently used first, until those left take `most_bytes` at most. Whoever reads an
/// order meanwhile has it open; whoever comes later finds it anew. The number of orders dropped. Safe between
/// threads and processes.
std::int64_t trim_orders(const std::string& folder, std::int64_t most_bytes);

/// Drops what processes that were killed have left half-written, if it is an hour old.
void drop_abandoned_orders(const std::string& folder);

}  // namespace stanchion
