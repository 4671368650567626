// Damaged files never crash a reader: cut at every byte, or with bytes changed, they are refused with a
// remedy or give a matrix that holds its invariants.
#include <gtest/gtest.h>

#include "io/csv.hpp"
#include "io/equation_list.hpp"
#include "io/node_table.hpp"
#include "io/value_list.hpp"
#include "matrices.hpp"
#include "temp_folder.hpp"

namespace stanchion {
namespace {

const std::string kExamples = std::string(STANCHION_DATA) + "/examples/";
const char* const kTextMatrices[] = {
    "matrix_market/valid.mtx",    "matrix_market_general/valid.mtx", "matrix_market_integer/valid.mtx",
    "rutherford_boeing/valid.rb", "harwell_boeing/valid.rsa",        "triplets/valid.csv",
    "node_keyed/valid.csv",       "diagonal_mass/valid.txt",         "npz/valid.npz",
    "gzip/valid.mtx.gz"};

MatrixReadOptions small_limit() {
  MatrixReadOptions options;
  options.role = MatrixRole::kMass;
  options.memory_limit_bytes = Offset{1} << 26;
  return options;
}

void expect_sound(const Result<MatrixFile>& file, const std::string& what) {
  if (file.ok()) {
    EXPECT_TRUE(check_invariants(file->matrix)) << what;
    return;
  }
  EXPECT_TRUE(file.status().kind() == StatusKind::kBadInput ||
              file.status().kind() == StatusKind::kResourceLimit)
      << what;
  EXPECT_FALSE(file.status().remedy().empty()) << what << file.status().to_string();
}

TEST(Damaged, CutAtEveryByteAFileIsRefusedOrRightOrSuspected) {
  ThreadPool pool(1);
  for (const char* name : kTextMatrices) {
    const std::string whole = testing::file_bytes(kExamples + name);
    const auto right = read_matrix_bytes(whole, name, small_limit(), pool);
    ASSERT_TRUE(right.ok()) << right.status().to_string();
    const bool counted = std::string(name).find("triplets") == std::string::npos &&
                         std::string(name).find("keyed") == std::string::npos &&
                         std::string(name).find("diagonal") == std::string::npos;
    for (std::size_t size = 0; size < whole.size(); ++size) {
      const auto file = read_matrix_bytes(std::string_view(whole).substr(0, size), name, small_limit(), pool);
      const std::string what = std::string(name) + " cut at " + std::to_string(size);
      expect_sound(file, what);
      // Formats that announce their size cannot lose an entry without notice.
      if (!file.ok() || !counted) continue;
      EXPECT_TRUE(testing::same(file->matrix, right->matrix) ||
                  testing::find_warning(file->warnings, "unfinished-line") != nullptr)
          << what;
    }
  }
}

TEST(Damaged, AnyByteChangedIsSurvived) {
  ThreadPool pool(1);
  std::mt19937 random(11);
  for (const char* name : kTextMatrices) {
    const std::string whole = testing::file_bytes(kExamples + name);
    for (std::size_t at = 0; at < whole.size(); ++at) {
      for (const char byte : {'\0', '9', '\n', ' ', '-', '\xff', static_cast<char>(random())}) {
        std::string changed = whole;
        changed[at] = byte;
        expect_sound(read_matrix_bytes(changed, name, small_limit(), pool),
                     std::string(name) + " changed at " + std::to_string(at));
      }
    }
  }
}

TEST(Damaged, CutHdf5FilesAreSurvived) {
  const testing::TempFolder folder;
  ThreadPool pool(1);
  const std::string whole = testing::file_bytes(kExamples + "hdf5/valid.h5");
  for (std::size_t size = 0; size < whole.size(); size += 13) {
    const std::string path = folder.write("k.h5", std::string_view(whole).substr(0, size));
    const auto file = read_matrix(path, small_limit(), pool);
    expect_sound(file, std::to_string(size));
    EXPECT_FALSE(file.ok()) << size;
  }
}

TEST(Damaged, CutAndChangedTablesAreSurvived) {
  const testing::TempFolder folder;
  Warnings warnings;
  const std::string path = folder.path("table.csv");
  DofMap map;
  for (int i = 0; i < 4; ++i) map.append(10 * i, "ux");
  for (const char* kind : {"dofs", "nodes", "axes", "fix", "multipliers", "values"}) {
    const std::string whole = testing::file_bytes(kExamples + kind + "/valid.csv");
    for (std::size_t at = 0; at < whole.size(); ++at) {
      for (const int way : {0, 1, 2, 3}) {
        std::string text = whole.substr(0, way == 0 ? at : whole.size());
        if (way > 0) text[at] = "\0\"\xff"[way - 1];
        folder.write("table.csv", text);
        for (const Status& status :
             {read_dof_map(path, warnings).status(), read_nodes(path).status(), read_axes(path).status(),
              read_equation_list(path, 4, &map, warnings).status(), read_values(path).status()}) {
          EXPECT_TRUE(status.ok() || (status.kind() == StatusKind::kBadInput && !status.remedy().empty()))
              << status.to_string();
        }
      }
    }
  }
}

}  // namespace
}  // namespace stanchion
