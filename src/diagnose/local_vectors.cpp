#include "diagnose/local_vectors.hpp"

#include <algorithm>
#include <cmath>

namespace stanchion {

LocalVectors gather(const Structure& structure, std::vector<Index> nodes, const Columns& x,
                    std::span<const Index> columns) {
  LocalVectors local;
  local.nodes = std::move(nodes);
  local.count = columns.size();
  for (const Index node : local.nodes) {
    local.first.push_back(local.rows.size());
    for (const Index row : structure.rows_of(node)) {
      local.rows.push_back(row);
      for (const Index c : columns) local.value.push_back(x.row(row)[c]);
    }
  }
  local.first.push_back(local.rows.size());
  return local;
}

LocalVectors combined(const LocalVectors& local, const std::vector<std::vector<double>>& coefficients) {
  LocalVectors result{local.nodes, local.rows, local.first, coefficients.size(), {}};
  result.value.assign(local.rows.size() * coefficients.size(), 0.0);
  for (std::size_t i = 0; i < local.rows.size(); ++i) {
    for (std::size_t b = 0; b < coefficients.size(); ++b) {
      double sum = 0;
      for (std::size_t c = 0; c < local.count; ++c) sum += local.row(i)[c] * coefficients[b][c];
      result.value[i * coefficients.size() + b] = sum;
    }
  }
  return result;
}

LocalVectors restricted(const LocalVectors& local, const std::vector<Index>& nodes) {
  LocalVectors result;
  result.count = local.count;
  for (std::size_t a = 0; a < local.nodes.size() && result.nodes.size() < nodes.size(); ++a) {
    if (local.nodes[a] != nodes[result.nodes.size()]) continue;
    result.nodes.push_back(local.nodes[a]);
    result.first.push_back(result.rows.size());
    for (std::size_t i = local.first[a]; i < local.first[a + 1]; ++i) {
      result.rows.push_back(local.rows[i]);
      result.value.insert(result.value.end(), local.row(i), local.row(i) + local.count);
    }
  }
  result.first.push_back(result.rows.size());
  return result;
}

std::vector<double> node_energy(const LocalVectors& local) {
  std::vector<double> energy(local.nodes.size(), 0.0);
  for (std::size_t a = 0; a < local.nodes.size(); ++a) {
    for (std::size_t k = local.first[a] * local.count; k < local.first[a + 1] * local.count; ++k) {
      energy[a] += local.value[k] * local.value[k];
    }
  }
  return energy;
}

std::vector<Index> moving_nodes(const LocalVectors& local, double active) {
  const std::vector<double> energy = node_energy(local);
  const double most = energy.empty() ? 0 : *std::max_element(energy.begin(), energy.end());
  std::vector<Index> nodes;
  for (std::size_t a = 0; a < energy.size(); ++a) {
    if (energy[a] > active * active * most) nodes.push_back(local.nodes[a]);
  }
  return nodes;
}

void orthonormalise(LocalVectors& local) {
  constexpr double kIndependent = 1e-9;
  const std::size_t n = local.rows.size(), m = local.count;
  std::vector<std::vector<double>> kept;
  for (std::size_t c = 0; c < m; ++c) {
    std::vector<double> column(n);
    double before = 0;
    for (std::size_t i = 0; i < n; ++i) {
      column[i] = local.row(i)[c];
      before += column[i] * column[i];
    }
    double left = before;
    for (int pass = 0; pass < 2; ++pass) {
      for (const auto& earlier : kept) {
        double along = 0;
        for (std::size_t i = 0; i < n; ++i) along += earlier[i] * column[i];
        for (std::size_t i = 0; i < n; ++i) column[i] -= along * earlier[i];
      }
      left = 0;
      for (const double v : column) left += v * v;
    }
    if (!(left > kIndependent * kIndependent * before)) continue;
    for (double& v : column) v /= std::sqrt(left);
    kept.push_back(std::move(column));
  }
  local.count = kept.size();
  local.value.assign(n * kept.size(), 0.0);
  for (std::size_t c = 0; c < kept.size(); ++c) {
    for (std::size_t i = 0; i < n; ++i) local.value[i * kept.size() + c] = kept[c][i];
  }
}

}  // namespace stanchion
