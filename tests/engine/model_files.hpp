// Matrices written to files of their own, so that the engine is asked as a user asks it.
#pragma once

#include <gtest/gtest.h>

#include <filesystem>
#include <fstream>
#include <string>
#include <vector>

#include "engine/pipeline.hpp"
#include "io/write_matrix.hpp"
#include "sparse/symmetric_matrix.hpp"

namespace stanchion::test {

/// A folder that goes away with the test.
class ModelFiles {
 public:
  ModelFiles() {
    const auto* info = testing::UnitTest::GetInstance()->current_test_info();
    folder_ =
        std::filesystem::temp_directory_path() / (std::string("stanchion_") + info->test_suite_name() + "_" +
                                                  info->name() + "_" + std::to_string(::getpid()));
    std::filesystem::create_directories(folder_);
  }
  ~ModelFiles() { std::filesystem::remove_all(folder_); }
  ModelFiles(const ModelFiles&) = delete;

  std::string matrix(const std::string& name, const SymmetricMatrix& matrix) const {
    const std::string path = (folder_ / name).string();
    EXPECT_TRUE(write_matrix(matrix, path).ok());
    return path;
  }
  std::string text(const std::string& name, const std::string& content) const {
    const std::string path = (folder_ / name).string();
    std::ofstream(path) << content;
    return path;
  }

 private:
  std::filesystem::path folder_;
};

inline Outcome answer(Result<Outcome> result) {
  EXPECT_TRUE(result.ok()) << result.status().to_string();
  return result.ok() ? std::move(*result) : Outcome{};
}

inline bool warned(const Outcome& outcome, const std::string& code) {
  for (const Warning& warning : outcome.warnings) {
    if (warning.code == code) return true;
  }
  return false;
}

/// n unit springs in a row; `ends` of it held (0, 1 or 2). Closed-form spectra: 4 sin^2(...), see each test.
inline SymmetricMatrix spring_chain(Index n, int held) {
  std::vector<Triplet> entries;
  for (Index i = 1; i < n; ++i) entries.insert(entries.end(), {{i, i, 1}, {i - 1, i - 1, 1}, {i, i - 1, -1}});
  if (held > 0) entries.push_back({0, 0, 1});
  if (held > 1) entries.push_back({n - 1, n - 1, 1});
  return from_triplets(n, entries);
}

inline SymmetricMatrix diagonal(const std::vector<double>& values) {
  std::vector<Triplet> entries;
  for (std::size_t i = 0; i < values.size(); ++i) {
    if (values[i] != 0) entries.push_back({static_cast<Index>(i), static_cast<Index>(i), values[i]});
  }
  return from_triplets(static_cast<Index>(values.size()), entries);
}

/// Asks for omega^2 of K and M diagonal: the quotients of their entries where M has one (by hand).
inline Request diagonal_pencil(ModelFiles& files, const std::vector<double>& stiffness,
                               const std::vector<double>& mass) {
  Request request;
  request.input.stiffness = files.matrix("K.mtx", diagonal(stiffness));
  request.input.mass = files.matrix("M.mtx", diagonal(mass));
  request.pencil = Pencil::kMass;
  request.bracket.unit = ValueUnit::kOmega2;
  return request;
}

}  // namespace stanchion::test
