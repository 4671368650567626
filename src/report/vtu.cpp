#include "report/vtu.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <vector>

namespace stanchion {
namespace {

constexpr int kVertex = 1, kLine = 3;  ///< cell types of the format

template <class Values, class Write>
void array(std::string& xml, const std::string& attributes, const Values& values, const Write& write) {
  xml += "<DataArray " + attributes + " format=\"ascii\">\n";
  for (const auto& value : values) write(xml, value);
  xml += "\n</DataArray>\n";
}

}  // namespace

std::string to_vtu(const LocateOutcome& located) {
  const Picture& picture = located.picture;
  std::vector<char> linked(picture.node.size(), 0);
  for (const auto& [a, b] : picture.links)
    linked[static_cast<std::size_t>(a)] = linked[static_cast<std::size_t>(b)] = 1;
  std::vector<Index> alone;
  for (std::size_t k = 0; k < linked.size(); ++k) {
    if (!linked[k]) alone.push_back(static_cast<Index>(k));
  }
  const std::size_t cells = picture.links.size() + alone.size();
  std::string xml = fmt::format(
      "<?xml version=\"1.0\"?>\n<VTKFile type=\"UnstructuredGrid\" version=\"0.1\" "
      "byte_order=\"LittleEndian\">\n<UnstructuredGrid>\n<Piece NumberOfPoints=\"{}\" "
      "NumberOfCells=\"{}\">\n<PointData>\n",
      picture.node.size(), cells);
  const auto number = [](std::string& out, auto value) { out += fmt::format("{} ", value); };
  array(xml, "type=\"Int64\" Name=\"node\"", picture.node, number);
  array(xml, "type=\"Int32\" Name=\"component\"", picture.component, number);
  if (located.accuracy && located.accuracy->by_node.size() == picture.node.size()) {
    array(xml, "type=\"Float32\" Name=\"digits_lost\"", located.accuracy->by_node, number);
  }
  for (std::size_t k = 0; k < located.directions.size(); ++k) {
    const auto& shape = located.directions[k].shape;
    if (shape.size() != picture.node.size()) continue;
    array(xml, fmt::format("type=\"Float32\" Name=\"motion_{}\" NumberOfComponents=\"3\"", k + 1), shape,
          [](std::string& out, const std::array<float, 3>& u) {
            out += fmt::format("{} {} {} ", u[0], u[1], u[2]);
          });
  }
  xml += "</PointData>\n<Points>\n";
  array(xml, "type=\"Float64\" NumberOfComponents=\"3\"", picture.place,
        [](std::string& out, const std::array<double, 3>& p) {
          out += fmt::format("{} {} {} ", p[0], p[1], p[2]);
        });
  xml += "</Points>\n<Cells>\n";
  xml += "<DataArray type=\"Int32\" Name=\"connectivity\" format=\"ascii\">\n";
  for (const auto& [a, b] : picture.links) xml += fmt::format("{} {} ", a, b);
  for (const Index node : alone) xml += fmt::format("{} ", node);
  xml += "\n</DataArray>\n<DataArray type=\"Int32\" Name=\"offsets\" format=\"ascii\">\n";
  for (std::size_t c = 1; c <= cells; ++c) {
    const std::size_t lines = std::min(c, picture.links.size());
    xml += fmt::format("{} ", 2 * lines + (c - lines));
  }
  xml += "\n</DataArray>\n<DataArray type=\"UInt8\" Name=\"types\" format=\"ascii\">\n";
  for (std::size_t c = 0; c < cells; ++c)
    xml += fmt::format("{} ", c < picture.links.size() ? kLine : kVertex);
  xml += "\n</DataArray>\n</Cells>\n</Piece>\n</UnstructuredGrid>\n</VTKFile>\n";
  return xml;
}

}  // namespace stanchion
