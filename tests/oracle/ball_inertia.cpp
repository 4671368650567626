#include "oracle/ball_inertia.hpp"

#include <arb.h>
#include <arb_mat.h>

#include <vector>

namespace stanchion::test {
namespace {

/// Lower triangle of a symmetric matrix of balls.
class BallMatrix {
 public:
  BallMatrix(const ShiftedMatrix& matrix, std::span<const double> shifts, slong bits)
      : rows_(matrix.family->rows), bits_(bits) {
    arb_mat_init(balls_, rows_, rows_);
    for (arb_t& ball : scratch_) arb_init(ball);
    fill(matrix, shifts);
  }
  ~BallMatrix() {
    arb_mat_clear(balls_);
    for (arb_t& ball : scratch_) arb_clear(ball);
  }
  BallMatrix(const BallMatrix&) = delete;
  BallMatrix& operator=(const BallMatrix&) = delete;

  BallInertia eliminate() {
    BallInertia count;
    for (Index i = 0; i < rows_; ++i) left_.push_back(i);
    while (!left_.empty()) {
      if (const auto place = largest_diagonal(); place < left_.size()) {
        eliminate_one(place, count);
      } else if (const auto pair = negative_pair(); pair[1] > 0) {
        eliminate_pair(pair, count);
      } else {
        count.open = static_cast<Index>(left_.size());
        break;
      }
    }
    return count;
  }

 private:
  arb_ptr at(Index i, Index j) { return arb_mat_entry(balls_, i > j ? i : j, i > j ? j : i); }

  void fill(const ShiftedMatrix& matrix, std::span<const double> shifts) {
    const MatrixFamily& family = *matrix.family;
    for (Index j = 0; j < rows_; ++j) {
      for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
        arb_ptr entry = at(family.row[k], j);
        for (std::size_t t = 0; t < matrix.coefficients.size(); ++t) {
          arb_set_d(scratch_[0], matrix.coefficients[t]);
          arb_set_d(scratch_[1], family.values[t][k]);
          arb_addmul(entry, scratch_[0], scratch_[1], bits_);
        }
        for (const Index side : {family.row[k], j}) {
          arb_set_d(scratch_[0], (*matrix.scale)[side]);
          arb_mul(entry, entry, scratch_[0], bits_);
        }
      }
      subtract(j, matrix.offset);
      for (const double shift : shifts) subtract(j, shift);
    }
  }

  void subtract(Index row, double shift) {
    arb_set_d(scratch_[0], shift);
    arb_sub(at(row, row), at(row, row), scratch_[0], bits_);
  }

  /// Place in left_ of the largest diagonal that is certainly not zero; left_.size() when there is none.
  std::size_t largest_diagonal() {
    std::size_t best = left_.size();
    for (std::size_t p = 0; p < left_.size(); ++p) {
      arb_ptr diagonal = at(left_[p], left_[p]);
      if (arb_contains_zero(diagonal)) continue;
      if (best == left_.size() ||
          arf_cmpabs(arb_midref(diagonal), arb_midref(at(left_[best], left_[best]))) > 0) {
        best = p;
      }
    }
    return best;
  }

  /// Places p < q with a certainly negative determinant a_pp a_qq - a_pq^2; {0, 0} when there are none.
  std::array<std::size_t, 2> negative_pair() {
    for (std::size_t q = 1; q < left_.size(); ++q) {
      for (std::size_t p = 0; p < q; ++p) {
        if (arb_contains_zero(at(left_[p], left_[q]))) continue;
        determinant(left_[p], left_[q]);
        if (arb_is_negative(scratch_[2])) return {p, q};
      }
    }
    return {0, 0};
  }

  /// scratch_[2] = a_pp a_qq - a_pq^2.
  void determinant(Index p, Index q) {
    arb_mul(scratch_[2], at(p, p), at(q, q), bits_);
    arb_submul(scratch_[2], at(p, q), at(p, q), bits_);
  }

  void eliminate_one(std::size_t place, BallInertia& count) {
    const Index p = left_[place];
    left_.erase(left_.begin() + static_cast<std::ptrdiff_t>(place));
    ++(arb_is_negative(at(p, p)) ? count.negative : count.positive);
    for (std::size_t a = 0; a < left_.size(); ++a) {
      if (arb_is_zero(at(left_[a], p))) continue;
      arb_div(scratch_[0], at(left_[a], p), at(p, p), bits_);
      for (std::size_t b = 0; b <= a; ++b) {
        if (arb_is_zero(at(left_[b], p))) continue;
        arb_submul(at(left_[a], left_[b]), scratch_[0], at(left_[b], p), bits_);
      }
    }
  }

  /// One pivot of either sign. a_ij -= [a_ip a_iq] [a_pp a_pq; a_pq a_qq]^-1 [a_jp a_jq]^T.
  void eliminate_pair(const std::array<std::size_t, 2>& places, BallInertia& count) {
    const Index p = left_[places[0]], q = left_[places[1]];
    left_.erase(left_.begin() + static_cast<std::ptrdiff_t>(places[1]));
    left_.erase(left_.begin() + static_cast<std::ptrdiff_t>(places[0]));
    ++count.negative;
    ++count.positive;
    determinant(p, q);
    for (std::size_t a = 0; a < left_.size(); ++a) {
      const Index i = left_[a];
      arb_mul(scratch_[0], at(i, p), at(q, q), bits_);
      arb_submul(scratch_[0], at(i, q), at(p, q), bits_);
      arb_div(scratch_[0], scratch_[0], scratch_[2], bits_);
      arb_mul(scratch_[1], at(i, q), at(p, p), bits_);
      arb_submul(scratch_[1], at(i, p), at(p, q), bits_);
      arb_div(scratch_[1], scratch_[1], scratch_[2], bits_);
      for (std::size_t b = 0; b <= a; ++b) {
        arb_submul(at(i, left_[b]), scratch_[0], at(left_[b], p), bits_);
        arb_submul(at(i, left_[b]), scratch_[1], at(left_[b], q), bits_);
      }
    }
  }

  Index rows_;
  slong bits_;
  arb_mat_t balls_;
  arb_t scratch_[3];
  std::vector<Index> left_;
};

}  // namespace

BallInertia ball_inertia(const ShiftedMatrix& matrix, std::span<const double> shifts, int most_bits) {
  for (slong bits = 192;; bits *= 2) {
    const BallInertia found = BallMatrix(matrix, shifts, bits).eliminate();
    if (found.open == 0 || 2 * bits > most_bits) return found;
  }
}

}  // namespace stanchion::test
