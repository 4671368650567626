#include "io/preflight.hpp"

namespace stanchion {

Warnings compare_matrices(const PreflightFacts& stiffness, const std::string& stiffness_path,
                          const PreflightFacts& second, const std::string& second_path, MatrixRole role,
                          bool minus) {
  Warnings warnings;
  const bool mass = role == MatrixRole::kMass;
  // A stiffness matrix has hardly a negative diagonal entry; a geometric one nearly always has some.
  const bool stiffness_doubtful = stiffness.negative_diagonals * 20 > stiffness.positive_diagonals;
  const bool swapped =
      mass ? stiffness.median_diagonal > 0 && second.median_diagonal > stiffness.median_diagonal
           : stiffness_doubtful && second.negative_diagonals == 0 && second.positive_diagonals > 0;
  if (swapped) {
    warnings.push_back(
        {"swapped-matrices",
         mass ? "the entries of M exceed those of K, so that all motions would be slower than a radian a "
                "second. Are the two files exchanged, or the units mixed?"
              : "K has many negative diagonal entries and G has none: are the two files exchanged?",
         stiffness_path + ", " + second_path});
    return warnings;
  }
  if (mass) return warnings;
  const auto stiffening = minus ? second.negative_diagonals : second.positive_diagonals;
  const auto softening = minus ? second.positive_diagonals : second.negative_diagonals;
  if (stiffening > 0 && softening == 0) {
    warnings.push_back({"sign-of-geometric",
                        std::string("every diagonal entry of G stiffens under K ") + (minus ? "-" : "+") +
                            " f G, f positive: this load pulls everywhere, or G was written for the other "
                            "sign (--load-sign " +
                            (minus ? "plus" : "minus") + ")",
                        second_path});
  }
  return warnings;
}

}  // namespace stanchion
