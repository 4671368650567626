#include "diagnose/held_motions.hpp"

#include <algorithm>
#include <cmath>
#include <utility>

namespace stanchion {

HeldMotions::HeldMotions(const Evidence& e, const std::vector<char>& part_wanted) {
  const auto wanted = [&](Index part) { return part_wanted[static_cast<std::size_t>(part)] != 0; };
  for (const NodeMotion& motion : e.motions.of_nodes) {
    const auto rows = e.s.rows_of(motion.node);
    if (wanted(e.part_of_row(rows.front()))) hold_local({-1, {rows.begin(), rows.end()}, motion.entry});
  }
  for (const RepeatedConstraint& motion : e.motions.of_constraints) {
    if (wanted(e.part_of_row(motion.rows.front()))) hold_local({-1, motion.rows, motion.entry});
  }
  const std::size_t local = motions_.size();
  std::vector<std::size_t> held_by(static_cast<std::size_t>(e.s.rows), local);
  for (std::size_t k = 0; k < local; ++k) held_by[static_cast<std::size_t>(motions_[k].held)] = k;
  for (Index part = 0; part < e.s.parts; ++part) {
    if (!wanted(part)) continue;
    const auto rows = e.s.part(part);
    const std::size_t first = motions_.size();
    for (const Index column : e.choice[static_cast<std::size_t>(part)].zero) {
      Motion motion{-1, {rows.begin(), rows.end()}, std::vector<double>(rows.size())};
      for (std::size_t i = 0; i < rows.size(); ++i) motion.entry[i] = e.near.x.row(rows[i])[column];
      // rows_of_part ascends, so that places of rows are found by bisection.
      const auto clear = [&motion](const Motion& before) {
        const auto place = [&motion](Index row) {
          return static_cast<std::size_t>(std::lower_bound(motion.rows.begin(), motion.rows.end(), row) -
                                          motion.rows.begin());
        };
        const double along = motion.entry[place(before.held)];
        if (along == 0) return;
        for (std::size_t i = 0; i < before.rows.size(); ++i)
          motion.entry[place(before.rows[i])] -= along * before.entry[i];
      };
      for (std::size_t i = 0; i < rows.size(); ++i) {
        if (held_by[static_cast<std::size_t>(rows[i])] < local)
          clear(motions_[held_by[static_cast<std::size_t>(rows[i])]]);
      }
      for (std::size_t k = first; k < motions_.size(); ++k) clear(motions_[k]);
      hold(std::move(motion));
    }
  }
}

void HeldMotions::hold_local(Motion motion) {
  if (!motions_.empty() && motions_.back().rows != motion.rows) group_ = motions_.size();
  for (std::size_t k = group_; k < motions_.size(); ++k) {
    const Motion& before = motions_[k];
    const auto at = std::find(motion.rows.begin(), motion.rows.end(), before.held) - motion.rows.begin();
    const double along = motion.entry[static_cast<std::size_t>(at)];
    for (std::size_t i = 0; i < motion.entry.size(); ++i) motion.entry[i] -= along * before.entry[i];
  }
  hold(std::move(motion));
}

void HeldMotions::hold(Motion motion) {
  const auto most = std::max_element(motion.entry.begin(), motion.entry.end(),
                                     [](double a, double b) { return std::fabs(a) < std::fabs(b); });
  if (most == motion.entry.end() || *most == 0) return;
  const double size = *most;
  motion.held = motion.rows[static_cast<std::size_t>(most - motion.entry.begin())];
  for (double& v : motion.entry) v /= size;
  rows_.push_back(motion.held);
  motions_.push_back(std::move(motion));
}

void HeldMotions::apply(Columns& x) const {
  std::vector<double> at(static_cast<std::size_t>(x.count));
  for (const Motion& motion : motions_) {
    std::copy_n(x.row(motion.held), x.count, at.begin());
    for (std::size_t i = 0; i < motion.rows.size(); ++i) {
      double* row = x.row(motion.rows[i]);
      for (std::size_t c = 0; c < at.size(); ++c) row[c] -= motion.entry[i] * at[c];
    }
    std::fill_n(x.row(motion.held), x.count, 0.0);
  }
}

}  // namespace stanchion
