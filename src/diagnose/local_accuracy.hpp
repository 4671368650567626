// How well double precision holds the model, equation by equation.
#pragma once

#include "diagnose/evidence.hpp"

namespace stanchion {

/// log10 of k_ii (K^-1)_ii for every equation, independent of scaling and order: about so many of the 16
/// decimal digits are lost there. Estimated by Gaussian vectors: for positive definite A = L D L^T the
/// entries of L^-T D^-1/2 w have the variances (A^-1)_ii, so that the mean of their squares is (A^-1)_ii
/// times a chi-squared variable over its degrees of freedom (the diagonal estimate of Bekas, Kokiopoulou,
/// Saad, Appl. Numer. Math. 57 (2007), with the root in place of the inverse). Cost: one half solve per eight
/// vectors.
///
/// Along a zero direction no digit is left. Where all of a part's zero directions are named, the part is
/// judged as if each were held at one equation (HeldMotions). Parts with negative directions, multipliers or
/// zero directions that are not told apart have no figure: the measure has a meaning for definite matrices
/// only. Writes `accuracy` and what was left out and why (`accuracy_note`) to `out`.
void judge_local_accuracy(Evidence& evidence);

}  // namespace stanchion
