// The small tables: dof maps, nodes, axes, lists of equations and of values.
#include <gtest/gtest.h>

#include "io/equation_list.hpp"
#include "io/node_table.hpp"
#include "io/value_list.hpp"
#include "matrices.hpp"
#include "temp_folder.hpp"

namespace stanchion {
namespace {

class Tables : public ::testing::Test {
 protected:
  std::string write(std::string_view text) { return folder_.write("table.csv", text); }
  std::string code(const Status& status) {
    return status.code() + status.place().substr(folder_.path("table.csv").size());
  }

  testing::TempFolder folder_;
  Warnings warnings_;
};

TEST_F(Tables, DofMapsInAnyOrderColumnOrderAndDress) {
  for (const char* text : {"1,10,ux\n2,10,rz\n3,,multiplier\n4,20,my dof\n",
                           "\xef\xbb\xbfnode;dof;remark;equation\r\n10;rz;x;2\r\n10;UX;;1\r\n;Multiplier;;"
                           "3\r\n20;\"my dof\";\"a;b\"\"c\";4\r\n",
                           "# map\n\n1\t10\tux\n2\t10\trz\n3\t\tmultiplier\n4\t20\tmy dof\n"}) {
    const auto map = read_dof_map(write(text), warnings_);
    ASSERT_TRUE(map.ok()) << map.status().to_string();
    ASSERT_EQ(map->equations(), 4);
    EXPECT_EQ(map->describe(0), "node 10, ux");
    EXPECT_EQ(map->describe(2), "multiplier");
    EXPECT_EQ(map->dof(3), "my dof");
    EXPECT_EQ(map->find(10, "RZ"), 1);
    EXPECT_EQ(map->find(10, "rx"), std::nullopt);
    EXPECT_EQ(map->multipliers(), std::vector<Index>{2});
    EXPECT_TRUE(map->held().empty());
  }
  EXPECT_TRUE(warnings_.empty());
}

TEST_F(Tables, DofMapsAreRefusedByLine) {
  const auto refused = [&](const char* text) { return code(read_dof_map(write(text), warnings_).status()); };
  EXPECT_EQ(refused("1,10,ux\n0,10,uy\n"), "index-out-of-range:2");
  EXPECT_EQ(refused("1,10,ux\n2,x,uy\n"), "bad-number:2");
  EXPECT_EQ(refused("1,10,ux\n2,-3,uy\n"), "index-out-of-range:2");
  EXPECT_EQ(refused("1,10,ux\n2,10\n"), "missing-field:2");
  EXPECT_EQ(refused("1,10,ux\n2,10,\n"), "missing-field:2");
  EXPECT_EQ(refused("1,10,ux\n2,10,uy,5\n"), "extra-text:2");
  EXPECT_EQ(refused("1,10,ux\n2,10,\"uy\n"), "open-quote:2");
  EXPECT_EQ(refused("2,10,ux\n"), "missing-equation:1");
  EXPECT_EQ(refused("equation,node,dof\n"), "empty-file");
  EXPECT_EQ(read_dof_map("/no/such/file", warnings_).status().code(), "file-not-found");
  EXPECT_EQ(read_dof_map("/", warnings_).status().code(), "not-a-file");
}

TEST_F(Tables, TwoEquationsOfOneDofAreAWarning) {
  const auto map = read_dof_map(write("1,10,ux\n2,10,ux\n3,10,held\n4,10,held\n"), warnings_);
  ASSERT_TRUE(map.ok());
  ASSERT_EQ(warnings_.size(), 1U);
  EXPECT_EQ(warnings_[0].code, "duplicate-dof");
  EXPECT_EQ(map->find(10, "ux"), 0);
  EXPECT_EQ(map->held(), (std::vector<Index>{2, 3}));
}

TEST_F(Tables, DofMapsAreWrittenAsTheyAreRead) {
  DofMap map;
  map.append(3, "ux");
  map.append(kNoNode, "multiplier");
  map.append(4, "a, \"b\"");
  const std::string path = folder_.path("table.csv");
  ASSERT_TRUE(write_dof_map(map, path).ok());
  const auto back = read_dof_map(path, warnings_);
  ASSERT_TRUE(back.ok()) << back.status().to_string();
  for (Index e = 0; e < 3; ++e) EXPECT_EQ(back->describe(e), map.describe(e));
  EXPECT_EQ(map.subset({2}).describe(0), "node 4, a, \"b\"");
}

TEST_F(Tables, EquationListsByNumberAndByName) {
  DofMap map;
  map.append(10, "ux");
  map.append(10, "uy");
  map.append(20, "ux");
  const auto by_number = read_equation_list(write("3\n1\n3\n"), 3, nullptr, warnings_);
  ASSERT_TRUE(by_number.ok());
  EXPECT_EQ(*by_number, (std::vector<Index>{0, 2}));
  ASSERT_EQ(warnings_.size(), 1U);
  EXPECT_EQ(warnings_[0].code, "repeated-equation");
  const auto by_name = read_equation_list(write("node dof\n20 ux\n10 uy\n"), 3, &map, warnings_);
  ASSERT_TRUE(by_name.ok()) << by_name.status().to_string();
  EXPECT_EQ(*by_name, (std::vector<Index>{1, 2}));
  const auto refused = [&](const char* text, const DofMap* dofs) {
    return code(read_equation_list(write(text), 3, dofs, warnings_).status());
  };
  EXPECT_EQ(refused("1\n4\n", nullptr), "index-out-of-range:2");
  EXPECT_EQ(refused("10,ux\n", nullptr), "no-dof-map");
  EXPECT_EQ(refused("10,ux\n10,uz\n", &map), "unknown-dof:2");
  EXPECT_EQ(refused("", nullptr), "empty-file");
  ASSERT_TRUE(write_equation_list(*by_number, folder_.path("table.csv")).ok());
  EXPECT_EQ(*read_equation_list(folder_.path("table.csv"), 3, nullptr, warnings_), *by_number);
}

TEST_F(Tables, NodesAndAxes) {
  const auto nodes = read_nodes(write("node,x,y,z\n5,1,2,3\n6,4,5\n"));
  ASSERT_TRUE(nodes.ok()) << nodes.status().to_string();
  ASSERT_NE(nodes->find(6), nullptr);
  EXPECT_EQ(*nodes->find(6), (std::array<double, 3>{4, 5, 0}));
  EXPECT_EQ(nodes->find(7), nullptr);
  ASSERT_TRUE(write_nodes(*nodes, folder_.path("table.csv")).ok());
  EXPECT_EQ(*read_nodes(folder_.path("table.csv"))->find(5), (std::array<double, 3>{1, 2, 3}));
  const auto axes = read_axes(write("7 0 1 0 -1 0 0 0 0 1\n"));
  ASSERT_TRUE(axes.ok()) << axes.status().to_string();
  EXPECT_EQ((*axes->find(7))[3], -1);
  EXPECT_EQ(code(read_axes(write("7 0 1 0 -1 0 0 0 0 1.1\n")).status()), "not-orthonormal:1");
}

TEST_F(Tables, ValueListsKeepOrderAndLines) {
  const auto values = read_values(write("# from the report\nlabel,value\nsway,2.5\ntorsion,1e3\n"));
  ASSERT_TRUE(values.ok()) << values.status().to_string();
  ASSERT_EQ(values->size(), 2U);
  EXPECT_EQ((*values)[0].value, 2.5);
  EXPECT_EQ((*values)[0].label, "sway");
  EXPECT_FALSE((*values)[0].tolerance.has_value());
  EXPECT_EQ((*values)[1].line, 4);
  const auto plain = read_values(write("2.5 0.1 sway\n"));
  ASSERT_TRUE(plain.ok()) << plain.status().to_string();
  EXPECT_EQ((*plain)[0].tolerance, 0.1);
  ASSERT_TRUE(write_values(*plain, folder_.path("table.csv")).ok());
  EXPECT_EQ((*read_values(folder_.path("table.csv")))[0].label, "sway");
}

}  // namespace
}  // namespace stanchion
