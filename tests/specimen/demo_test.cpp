// The packaged model in data/demo is what the lattice specimen gives, to the byte.
#include <gtest/gtest.h>

#include <filesystem>
#include <fstream>
#include <sstream>

#include "io/write_matrix.hpp"
#include "specimen/specimen.hpp"
#include "specimen/specimen_text.hpp"

namespace stanchion {
namespace {

std::string bytes_of(const std::filesystem::path& path) {
  std::ifstream file(path, std::ios::binary);
  EXPECT_TRUE(file) << path;
  std::ostringstream all;
  all << file.rdbuf();
  return all.str();
}

std::string packaged(const char* name) {
  return bytes_of(std::filesystem::path(STANCHION_DATA) / "demo" / name);
}

std::string written(const SymmetricMatrix& matrix) {
  const auto path = std::filesystem::path(::testing::TempDir()) / "stanchion_demo_test.mtx";
  const Status status = write_matrix(matrix, path.string());
  EXPECT_TRUE(status.ok()) << status.to_string();
  const std::string bytes = bytes_of(path);
  std::filesystem::remove(path);
  return bytes;
}

TEST(PackagedModel, IsTheLatticeSpecimenToTheByte) {
  const auto lattice = make_specimen("lattice", 900);
  ASSERT_TRUE(lattice.ok());
  EXPECT_EQ(dofs_csv(*lattice), packaged("dofs.csv"));
  EXPECT_EQ(nodes_csv(*lattice), packaged("nodes.csv"));
  EXPECT_EQ(expected_json(*lattice), packaged("expected.json"));
  EXPECT_TRUE(written(lattice->stiffness) == packaged("K.mtx"));
  EXPECT_TRUE(written(*lattice->geometric) == packaged("G.mtx"));
  EXPECT_TRUE(written(*lattice->mass) == packaged("M.mtx"));
}

}  // namespace
}  // namespace stanchion
