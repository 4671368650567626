// Where nodes are, and which way their axes point: `--nodes` and `--axes`.
#pragma once

#include <array>
#include <optional>
#include <string>
#include <unordered_map>
#include <vector>

#include "io/dof_map.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// Data of some nodes, in file order. `Data` is an array of numbers.
template <class Data>
class PerNode {
 public:
  Offset size() const { return static_cast<Offset>(nodes_.size()); }
  NodeNumber node(Offset i) const { return nodes_[static_cast<std::size_t>(i)]; }
  const Data& data(Offset i) const { return data_[static_cast<std::size_t>(i)]; }

  /// Data of a node, null when the table does not list it.
  const Data* find(NodeNumber node) const {
    const auto at = position_.find(node);
    return at == position_.end() ? nullptr : &data_[at->second];
  }

  /// False, and nothing added, when the node is listed already.
  bool append(NodeNumber node, const Data& data) {
    if (!position_.try_emplace(node, nodes_.size()).second) return false;
    nodes_.push_back(node);
    data_.push_back(data);
    return true;
  }

 private:
  std::vector<NodeNumber> nodes_;
  std::vector<Data> data_;
  std::unordered_map<NodeNumber, std::size_t> position_;
};

using NodeTable = PerNode<std::array<double, 3>>;  ///< x, y, z in the model's length unit
using AxesTable = PerNode<std::array<double, 9>>;  ///< rows: x, y, z axis of the node in global directions

/// Reads `node,x,y,z` (header line optional, z may be left out: 0). Errors, kBadInput with file:line: those
/// of reading CSV, "bad-number", "not-finite", "index-out-of-range", "duplicate-node", "empty-file".
Result<NodeTable> read_nodes(const std::string& path);

/// Reads `node,xx,xy,xz,yx,yy,yz,zx,zy,zz`. As read_nodes, and "not-orthonormal" (the axes are not at right
/// angles or not of length 1, to 1e-5) and "left-handed-axes".
Result<AxesTable> read_axes(const std::string& path);

/// Writes `node,x,y,z` with a header line; the file appears whole or not at all.
Status write_nodes(const NodeTable& nodes, const std::string& path);

}  // namespace stanchion
