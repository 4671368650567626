// The facts of the shared data folder beside the project (facts.json, published.json), as plain data.
#pragma once

#include <array>
#include <filesystem>
#include <optional>
#include <string>
#include <vector>

#include "sparse/symmetric_matrix.hpp"
#include "stanchion/types.hpp"

namespace stanchion::test {

/// [negative, zero, positive]
using Signs = std::array<Index, 3>;

/// What is known of one matrix file.
struct MatrixFact {
  std::string name, path;
  Signs inertia{};
  std::optional<double> gap;  ///< smallest distance of a nonzero eigenvalue from zero, where known
  bool diagonal = false;
};

/// A count of a pencil K - s M at one shift.
struct PencilFact {
  std::string stiffness_path, second_path;
  bool second_definite_or_semidefinite = true;
  double shift = 0;
  Index below = 0;
  std::string name() const;
};

/// A matrix given entry by entry, with its exact inertia.
struct SmallFact {
  std::string name;
  std::vector<std::vector<double>> full;
  Signs inertia{};
};

inline bool shared_data_present() {
  return std::filesystem::exists(STANCHION_SHARED_DATA "/facts.json");
}

/// Readers of the folder; they throw when a file does not hold what is expected.
std::vector<MatrixFact> matrix_facts();
std::vector<PencilFact> pencil_facts();
std::vector<SmallFact> small_adversarial_facts();

SymmetricMatrix from_full(const std::vector<std::vector<double>>& full);

}  // namespace stanchion::test
