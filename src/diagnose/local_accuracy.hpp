// How well double precision holds the model, equation by equation.
#pragma once

#include <cstdint>
#include <vector>

#include "diagnose/kept_factor.hpp"
#include "diagnose/structure.hpp"

namespace stanchion {

/// log10 of k_ii (K^-1)_ii for every position, independent of scaling and order: about so many of the 16
/// decimal digits are lost there. Estimated by `vectors` (a multiple of eight) Gaussian vectors: for positive
/// definite A = L D L^T the entries of L^-T D^-1/2 w have the variances (A^-1)_ii, so that the mean of their
/// squares is (A^-1)_ii times a chi-squared variable over its `vectors` degrees of freedom (the diagonal
/// estimate of Bekas, Kokiopoulou, Saad, Appl. Numer. Math. 57 (2007), with the root in place of the
/// inverse). Cost: one half solve per eight vectors.
std::vector<double> estimate_digits_lost(const Structure& structure, KeptFactor& factor, Index vectors,
                                         std::uint64_t seed);

}  // namespace stanchion
