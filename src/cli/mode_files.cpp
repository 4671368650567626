#include "cli/mode_files.hpp"

#include <fmt/format.h>

#include <bit>
#include <cstring>

#include "io/csv.hpp"
#include "io/dof_map.hpp"
#include "io/node_table.hpp"
#include "io/output_file.hpp"
#include "io/shortest.hpp"

namespace stanchion::cli {
namespace {

struct NamedMode {
  const CriticalValue* value;
  const Mode* mode;
};

std::vector<NamedMode> modes_of(const BracketOutcome& bracket) {
  std::vector<NamedMode> modes;
  for (const CriticalValue& value : bracket.critical) {
    for (const Mode& mode : value.modes) modes.push_back({&value, &mode});
  }
  return modes;
}

Result<std::optional<DofMap>> read_map(const InputRequest& input) {
  std::optional<DofMap> map;
  if (!input.dofs) return map;
  Warnings repeated;  // the run has given them already
  auto read = read_dof_map(*input.dofs, repeated);
  if (!read.ok()) return read.status();
  map = std::move(*read);
  return map;
}

/// NEP 1, version 1.0: columns one after the other.
std::string npy_of(const std::vector<NamedMode>& modes) {
  static_assert(std::endian::native == std::endian::little);
  const std::size_t rows = modes.empty() ? 0 : modes.front().mode->shape.size();
  std::string header =
      fmt::format("{{'descr': '<f8', 'fortran_order': True, 'shape': ({}, {}), }}", rows, modes.size());
  constexpr std::size_t kPreamble = 10, kAlignment = 64;
  header.append(kAlignment - (kPreamble + header.size() + 1) % kAlignment, ' ');
  header += '\n';
  std::string bytes("\x93NUMPY\x01\x00", 8);
  bytes += static_cast<char>(header.size() % 256);
  bytes += static_cast<char>(header.size() / 256);
  bytes += header;
  for (const NamedMode& named : modes) {
    const std::size_t begin = bytes.size();
    bytes.resize(begin + rows * sizeof(double));
    std::memcpy(bytes.data() + begin, named.mode->shape.data(), rows * sizeof(double));
  }
  return bytes;
}

std::string csv_of(const std::vector<NamedMode>& modes, const std::optional<DofMap>& map) {
  std::string text = "# mode shapes, the largest entry of each is 1\n";
  for (std::size_t k = 0; k < modes.size(); ++k) {
    const CriticalValue& value = *modes[k].value;
    const Mode& mode = *modes[k].mode;
    text += fmt::format(
        "# mode {}: a value in [{}, {}], which holds {}; Rayleigh quotient {}, relative residual {}\n", k + 1,
        number_text(value.low), number_text(value.high), value.multiplicity,
        number_text(mode.rayleigh_quotient), number_text(mode.residual));
  }
  text += map ? "equation,node,dof" : "equation";
  for (std::size_t k = 0; k < modes.size(); ++k) text += fmt::format(",mode{}", k + 1);
  text += '\n';
  const std::size_t rows = modes.empty() ? 0 : modes.front().mode->shape.size();
  for (std::size_t i = 0; i < rows; ++i) {
    append_integer(text, i + 1);
    if (map) {
      const auto equation = static_cast<Index>(i);
      text += ',';
      if (map->node(equation) != kNoNode) append_integer(text, map->node(equation));
      text += ',' + csv_field(map->dof(equation));
    }
    for (const NamedMode& named : modes) {
      text += ',';
      append_number(text, named.mode->shape[i]);
    }
    text += '\n';
  }
  return text;
}

using Vector = std::array<double, 3>;

/// Displacements of every listed node in global directions.
std::vector<Vector> displacements(const Mode& mode, const DofMap& map, const NodeTable& nodes,
                                  const std::unordered_map<NodeNumber, std::size_t>& place,
                                  const AxesTable* axes) {
  std::vector<Vector> moved(static_cast<std::size_t>(nodes.size()), Vector{});
  for (Index equation = 0; equation < map.equations(); ++equation) {
    const auto at = place.find(map.node(equation));
    if (at == place.end()) continue;
    const std::string& dof = map.dof(equation);
    const int axis = dof == "ux" ? 0 : dof == "uy" ? 1 : dof == "uz" ? 2 : -1;
    if (axis < 0) continue;
    const double entry = mode.shape[static_cast<std::size_t>(equation)];
    const std::array<double, 9>* own = axes != nullptr ? axes->find(map.node(equation)) : nullptr;
    for (int k = 0; k < 3; ++k) {
      const double cosine =
          own != nullptr ? (*own)[static_cast<std::size_t>(3 * axis + k)] : (k == axis ? 1.0 : 0.0);
      moved[at->second][static_cast<std::size_t>(k)] += cosine * entry;
    }
  }
  return moved;
}

void append_vectors(std::string& text, const std::vector<Vector>& vectors) {
  for (const Vector& vector : vectors) {
    append_number(text, vector[0]);
    text += ' ';
    append_number(text, vector[1]);
    text += ' ';
    append_number(text, vector[2]);
    text += '\n';
  }
}

std::string grid_of(const std::vector<NamedMode>& modes, const DofMap& map, const NodeTable& nodes,
                    const AxesTable* axes) {
  std::unordered_map<NodeNumber, std::size_t> place;
  std::vector<Vector> points;
  for (Offset i = 0; i < nodes.size(); ++i) {
    place[nodes.node(i)] = static_cast<std::size_t>(i);
    points.push_back(nodes.data(i));
  }
  const std::size_t count = points.size();
  std::string text = fmt::format(
      "<?xml version=\"1.0\"?>\n<VTKFile type=\"UnstructuredGrid\" version=\"0.1\" "
      "byte_order=\"LittleEndian\">\n"
      "<UnstructuredGrid>\n<Piece NumberOfPoints=\"{0}\" NumberOfCells=\"{0}\">\n<PointData>\n",
      count);
  for (std::size_t k = 0; k < modes.size(); ++k) {
    text += fmt::format(
        "<DataArray type=\"Float64\" NumberOfComponents=\"3\" format=\"ascii\" Name=\"mode {}: {:.10g}\">\n",
        k + 1, modes[k].mode->rayleigh_quotient);
    append_vectors(text, displacements(*modes[k].mode, map, nodes, place, axes));
    text += "</DataArray>\n";
  }
  text += "</PointData>\n<Points>\n<DataArray type=\"Float64\" NumberOfComponents=\"3\" format=\"ascii\">\n";
  append_vectors(text, points);
  text +=
      "</DataArray>\n</Points>\n<Cells>\n<DataArray type=\"Int64\" Name=\"connectivity\" format=\"ascii\">\n";
  for (std::size_t i = 0; i < count; ++i) text += fmt::format("{}\n", i);
  text += "</DataArray>\n<DataArray type=\"Int64\" Name=\"offsets\" format=\"ascii\">\n";
  for (std::size_t i = 1; i <= count; ++i) text += fmt::format("{}\n", i);
  text += "</DataArray>\n<DataArray type=\"UInt8\" Name=\"types\" format=\"ascii\">\n";
  for (std::size_t i = 0; i < count; ++i) text += "1\n";
  return text + "</DataArray>\n</Cells>\n</Piece>\n</UnstructuredGrid>\n</VTKFile>\n";
}

}  // namespace

Result<std::string> mode_table(const BracketOutcome& bracket, const InputRequest& input,
                               const std::string& path) {
  if (has_extension(path, ".npy")) return npy_of(modes_of(bracket));
  const auto map = read_map(input);
  if (!map.ok()) return map.status();
  return csv_of(modes_of(bracket), *map);
}

Result<std::string> mode_grid(const BracketOutcome& bracket, const InputRequest& input) {
  if (!input.nodes || !input.dofs) {
    return Status::bad_usage("contradiction", "a grid of the nodes needs to know them", "--vtu",
                             "name the tables with --nodes and --dofs");
  }
  const auto map = read_map(input);
  if (!map.ok()) return map.status();
  const auto nodes = read_nodes(*input.nodes);
  if (!nodes.ok()) return nodes.status();
  std::optional<AxesTable> axes;
  if (input.axes) {
    auto read = read_axes(*input.axes);
    if (!read.ok()) return read.status();
    axes = std::move(*read);
  }
  return grid_of(modes_of(bracket), **map, *nodes, axes ? &*axes : nullptr);
}

}  // namespace stanchion::cli
