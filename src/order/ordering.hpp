// Which equation is eliminated when: grouping, connected parts, nested dissection or minimum degree.
#pragma once

#include <span>

#include "order/graph.hpp"
#include "order/known_orders.hpp"
#include "order/quotient_graph.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

struct OrderingInput {
  const SymmetricMatrix* pattern = nullptr;  ///< union pattern of the pencil; values: any representative
  std::span<const Index> node_of;            ///< node number per equation (negative: none); empty: unknown
  bool zero_diagonals_join = true;           ///< keep multipliers next to a partner
  bool other_order = false;                  ///< minimum degree everywhere: a second opinion, not the fastest
  KnownOrders* known = nullptr;              ///< orders found before; outlives the call
  int threads = 1;                           ///< that may work at once; the order is the same for any number
  std::span<const char> weak_diagonal = {};  ///< of weak_diagonals(): joined like zero ones
};

/// The elimination order on the graph of equations with identical structure.
struct Elimination {
  Graph graph;              ///< vertices: groups of equations that the structure cannot tell apart
  Grouping grouping;        ///< vertex of every equation
  Buffer<Index> vertex_at;  ///< vertex eliminated k-th
  Buffer<Index> component_of_vertex;
  Index components = 0;
  Index dissected = 0;  ///< parts ordered by nested dissection (the others by minimum degree)
  bool known = false;   ///< the order was found before
};

/// Orders every connected part apart; of nested dissection and minimum degree keeps the one with fewer
/// operations by column counts (minimum degree is tried on small and on thin graphs only).
/// Cost: dominated by METIS on the quotient graph. Reproducible.
Result<Elimination> order_equations(const OrderingInput& input);

}  // namespace stanchion
