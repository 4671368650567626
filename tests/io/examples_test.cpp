// Every file of data/examples gives what data/examples/expected.csv says, and every refusal names a remedy.
#include <gtest/gtest.h>

#include "io/csv.hpp"
#include "io/equation_list.hpp"
#include "io/node_table.hpp"
#include "io/read_matrix.hpp"
#include "io/value_list.hpp"
#include "temp_folder.hpp"

namespace stanchion {
namespace {

const std::string kExamples = std::string(STANCHION_DATA) + "/examples/";

Status read_example(const std::string& kind, const std::string& path) {
  Warnings warnings;
  if (kind == "dofs") return read_dof_map(path, warnings).status();
  if (kind == "nodes") return read_nodes(path).status();
  if (kind == "axes") return read_axes(path).status();
  if (kind == "values") return read_values(path).status();
  if (kind == "fix" || kind == "multipliers") {
    const auto dofs = read_dof_map(kExamples + "dofs/valid.csv", warnings);
    if (!dofs.ok()) return dofs.status();
    return read_equation_list(path, dofs->equations(), &*dofs, warnings).status();
  }
  ThreadPool pool(2);
  MatrixReadOptions options;
  if (kind == "diagonal_mass") options.role = MatrixRole::kMass;
  const auto file = read_matrix(path, options, pool);
  EXPECT_TRUE(!file.ok() || check_invariants(file->matrix)) << path;
  return file.status();
}

TEST(Examples, EachFileGivesWhatIsExpected) {
  const std::string text = testing::file_bytes(kExamples + "expected.csv");
  const std::string name = "expected.csv";
  CsvReader csv(text, name, {{"kind", true}, {"file", true}, {"code", true}, {"place", true}});
  std::vector<std::string_view> fields;
  const std::string readme = testing::file_bytes(kExamples + "README.md");
  int files = 0;
  while (csv.next(fields)) {
    const std::string kind(fields[0]), path = kExamples + kind + "/" + std::string(fields[1]);
    const Status status = read_example(kind, path);
    EXPECT_EQ(status.code(), fields[2]) << path << "\n" << status.to_string();
    if (!status.ok()) {
      EXPECT_EQ(status.kind(), StatusKind::kBadInput) << path;
      EXPECT_EQ(status.place(), path + std::string(fields[3])) << status.to_string();
      EXPECT_FALSE(status.remedy().empty()) << path;
      EXPECT_NE(readme.find(status.message() + " [" + status.code() + "]"), std::string::npos)
          << "data/examples/README.md should show: " << status.message();
    }
    ++files;
  }
  EXPECT_TRUE(csv.status().ok()) << csv.status().to_string();
  EXPECT_EQ(files, 17 * 4);
}

TEST(Examples, EachKindHasOneValidAndThreeBadFilesThatAreExpected) {
  const std::string expected = testing::file_bytes(kExamples + "expected.csv");
  for (const auto& kind : std::filesystem::directory_iterator(kExamples)) {
    if (!kind.is_directory()) continue;
    int valid = 0, bad = 0;
    for (const auto& file : std::filesystem::directory_iterator(kind.path())) {
      const std::string name = file.path().filename().string();
      (name.rfind("valid", 0) == 0 ? valid : bad) += 1;
      const std::string line = kind.path().filename().string() + "," + name + ",";
      EXPECT_NE(expected.find(line), std::string::npos) << line;
    }
    EXPECT_EQ(valid, 1) << kind.path();
    EXPECT_EQ(bad, 3) << kind.path();
  }
}

TEST(Examples, TheValidChainIsTheSameInEveryFormat) {
  ThreadPool pool(1);
  const auto first = read_matrix(kExamples + "matrix_market/valid.mtx", {}, pool);
  ASSERT_TRUE(first.ok());
  for (const char* name : {"rutherford_boeing/valid.rb", "harwell_boeing/valid.rsa", "npz/valid.npz",
                           "hdf5/valid.h5", "gzip/valid.mtx.gz"}) {
    const auto other = read_matrix(kExamples + name, {}, pool);
    ASSERT_TRUE(other.ok()) << other.status().to_string();
    ASSERT_EQ(other->matrix.entries(), first->matrix.entries()) << name;
    for (Offset k = 0; k < first->matrix.entries(); ++k) {
      EXPECT_EQ(other->matrix.row[k], first->matrix.row[k]) << name;
      EXPECT_EQ(other->matrix.value[k], first->matrix.value[k]) << name;
    }
  }
}

}  // namespace
}  // namespace stanchion
