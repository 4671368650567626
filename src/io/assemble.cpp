#include "io/assemble.hpp"

#include <algorithm>
#include <cmath>
#include <cstring>

#include "io/column_order.hpp"
#include "io/place.hpp"
#include "io/shortest.hpp"

namespace stanchion {
namespace {

constexpr std::size_t kPlacesKept = 3;

/// What one piece of the columns saw; pieces are joined in order, so the result never depends on timing.
struct Tally {
  Offset lower = 0, upper = 0, pairs = 0, unequal = 0, duplicates = 0;
  std::vector<EntryPlace> places;
  double largest = 0, at_lower = 0, at_upper = 0;
  EntryPlace largest_place;
  EntryPlace overflow{-1, -1};

  void differs(double below, double above, EntryPlace place) {
    const double difference = std::fabs(below - above);
    if (difference == 0) return;
    ++unequal;
    if (difference <= largest) return;
    largest = difference, at_lower = below, at_upper = above, largest_place = place;
  }

  void join(const Tally& other) {
    lower += other.lower, upper += other.upper, pairs += other.pairs;
    unequal += other.unequal, duplicates += other.duplicates;
    for (const auto& place : other.places) {
      if (places.size() < kPlacesKept) places.push_back(place);
    }
    if (other.largest > largest) {
      largest = other.largest, at_lower = other.at_lower, at_upper = other.at_upper;
      largest_place = other.largest_place;
    }
    if (overflow.row < 0) overflow = other.overflow;
  }
};

/// Sums duplicates and joins triangles of one sorted column in place; returns the entries left.
/// With `mean_of_single` an entry without its mirror image is half of a pair, else it stands for both.
class ColumnJoiner {
 public:
  ColumnJoiner(EntryList& entries, bool mean_of_single, Tally& tally)
      : entries_(entries), mean_of_single_(mean_of_single), tally_(tally) {}

  Offset join(Index column, Offset begin, Offset end) {
    Offset used = begin;
    for (Offset k = begin; k < end;) {
      const Index row = true_row(entries_.row[k]);
      double below = 0, above = 0;
      const Offset lowers = sum_run(row, column, k, end, below);
      const Offset uppers = k < end && entries_.row[k] == ~row ? sum_run(~row, column, k, end, above) : 0;
      double value = below;
      if (row != column) {
        tally_.lower += lowers > 0 ? 1 : 0;
        tally_.upper += uppers > 0 ? 1 : 0;
        value = combine(lowers > 0, uppers > 0, below, above, {row, column});
      }
      if (!std::isfinite(value) && tally_.overflow.row < 0) tally_.overflow = {row, column};
      entries_.row[used] = row;
      entries_.value[used] = value;
      ++used;
    }
    return used - begin;
  }

 private:
  /// Sums the entries from `k` whose stored row is `stored`; moves `k` past them.
  Offset sum_run(Index stored, Index column, Offset& k, Offset end, double& sum) {
    Offset found = 0;
    for (; k < end && entries_.row[k] == stored; ++k, ++found) {
      sum = found == 0 ? entries_.value[k] : sum + entries_.value[k];
    }
    if (found > 1) {
      tally_.duplicates += found - 1;
      const Index row = true_row(stored);
      const EntryPlace place = stored < 0 ? EntryPlace{column, row} : EntryPlace{row, column};
      if (tally_.places.size() < kPlacesKept) tally_.places.push_back(place);
    }
    return found;
  }

  double combine(bool has_lower, bool has_upper, double below, double above, EntryPlace place) {
    if (has_lower && has_upper) {
      ++tally_.pairs;
      tally_.differs(below, above, place);
      return below == above ? below : 0.5 * below + 0.5 * above;
    }
    const double single = has_lower ? below : above;
    if (!mean_of_single_) return single;
    tally_.differs(below, above, place);
    return 0.5 * single;
  }

  EntryList& entries_;
  bool mean_of_single_;
  Tally& tally_;
};

/// Cuts the columns in pieces of about equal numbers of entries.
std::vector<Index> cut_columns(const Buffer<Offset>& start, Index rows) {
  std::vector<Index> cuts{0};
  Offset limit = kEntriesPerPiece;
  for (Index column = 0; column < rows; ++column) {
    if (start[Offset{column} + 1] < limit) continue;
    cuts.push_back(column + 1);
    limit = start[Offset{column} + 1] + kEntriesPerPiece;
  }
  if (cuts.back() != rows) cuts.push_back(rows);
  return cuts;
}

/// True when entries lie in both triangles and nobody declared that one stands for both.
bool needs_mirror(const EntryList& entries, bool declared_symmetric) {
  if (declared_symmetric) return false;
  bool lower = false, upper = false;
  for (Offset k = 0; k < entries.size() && !(lower && upper); ++k) {
    if (entries.row[k] < 0) {
      upper = true;
    } else if (entries.row[k] != entries.column[k]) {
      lower = true;
    }
  }
  return lower && upper;
}

Storage storage_of(const Tally& tally) {
  if (tally.lower == 0 && tally.upper == 0) return Storage::kDiagonal;
  if (tally.upper == 0) return Storage::kLowerTriangle;
  if (tally.lower == 0) return Storage::kUpperTriangle;
  return tally.pairs == 0 ? Storage::kMixedTriangle : Storage::kBothTriangles;
}

/// Closes the gaps that joined entries left: column c keeps its first `kept[c]` entries.
void close_gaps(EntryList& entries, Buffer<Offset>& start, const Buffer<Index>& kept, Index rows) {
  Offset used = 0;
  for (Index column = 0; column < rows; ++column) {
    const Offset begin = start[column], count = kept[column];
    if (begin != used && count > 0) {
      std::memmove(entries.row.data() + used, entries.row.data() + begin,
                   static_cast<std::size_t>(count) * 4);
      std::memmove(entries.value.data() + used, entries.value.data() + begin,
                   static_cast<std::size_t>(count) * 8);
    }
    start[column] = used;
    used += count;
  }
  start[rows] = used;
  const auto trim = [used](auto& data) {
    data.shrink(used);
    data = data.clone();
  };
  trim(entries.row);
  trim(entries.value);
}

/// The whole join of unsorted or repeated entries.
Tally sort_and_join(RawMatrix& raw, Buffer<Offset>& start, bool mirror, ThreadPool& pool) {
  EntryList& entries = raw.entries;
  move_to_columns(entries, start, pool);
  const std::vector<Index> cuts = cut_columns(start, raw.rows);
  const auto pieces = static_cast<Offset>(cuts.size()) - 1;
  std::vector<Tally> tallies(static_cast<std::size_t>(std::max<Offset>(pieces, 0)));
  Buffer<Index> kept(raw.rows);
  pool.run(pieces, [&](Offset piece, int) {
    const auto at = static_cast<std::size_t>(piece);
    ColumnSorter sorter;
    ColumnJoiner joiner(entries, mirror, tallies[at]);
    for (Index column = cuts[at]; column < cuts[at + 1]; ++column) {
      const Offset begin = start[column], end = start[Offset{column} + 1];
      sorter.sort(entries, begin, end);
      kept[column] = static_cast<Index>(joiner.join(column, begin, end));
    }
  });
  Tally total;
  for (const Tally& tally : tallies) total.join(tally);
  Offset left = 0;
  for (const Index count : kept) left += count;
  if (left != entries.size()) close_gaps(entries, start, kept, raw.rows);
  return total;
}

/// A strictly sorted list is in compressed columns already; only the marks of the upper triangle go.
Tally take_as_sorted(EntryList& entries) {
  Tally tally;
  for (Offset k = 0; k < entries.size(); ++k) {
    if (entries.row[k] < 0) {
      ++tally.upper;
      entries.row[k] = ~entries.row[k];
    } else if (entries.row[k] != entries.column[k]) {
      ++tally.lower;
    }
  }
  entries.column.reset();
  return tally;
}

Status asymmetric(const Tally& tally, const std::string& path, const DofMap* dofs) {
  const auto [row, column] = tally.largest_place;
  const double scale = std::max(std::fabs(tally.at_lower), std::fabs(tally.at_upper));
  return Status::bad_input(
      "asymmetric",
      "the matrix is not symmetric: " + counted(tally.unequal, "pair differs", "pairs differ") +
          "; the largest difference, " + number_text(tally.largest) + " (" +
          number_text(tally.largest / scale) + " of the entry), is between " + number_text(tally.at_lower) +
          " at " + entry_name(row, column, dofs) + " and " + number_text(tally.at_upper) +
          " in the mirrored place",
      at_entry(path, row, column), "export one triangle only, or analyse (A + A^T)/2 with --symmetric-part");
}

}  // namespace

Result<SymmetricMatrix> assemble(RawMatrix& raw, bool symmetric_part, const std::string& path,
                                 const DofMap* dofs, ThreadPool& pool, AssemblyFacts& facts) {
  facts.entries_read = raw.entries.size();
  const bool mirror = needs_mirror(raw.entries, raw.declared_symmetric);
  Buffer<Offset> start = count_columns(raw.rows, raw.entries);
  const bool sorted = !mirror && strictly_sorted(raw.entries, pool);
  const Tally tally = sorted ? take_as_sorted(raw.entries) : sort_and_join(raw, start, mirror, pool);
  facts.storage = mirror ? Storage::kBothTriangles : storage_of(tally);
  facts.duplicates = tally.duplicates;
  facts.duplicate_places = tally.places;
  facts.largest_asymmetry = tally.largest;
  facts.asymmetry_place = tally.largest_place;
  facts.asymmetry_lower = tally.at_lower;
  facts.asymmetry_upper = tally.at_upper;
  if (tally.overflow.row >= 0) {
    return Status::bad_input("sum-overflows",
                             "the sum of the entries given for " +
                                 entry_name(tally.overflow.row, tally.overflow.column, dofs) +
                                 " is not finite",
                             at_entry(path, tally.overflow.row, tally.overflow.column),
                             "check the values, or choose units that keep stiffnesses below 1e300");
  }
  if (tally.unequal > 0 && !symmetric_part) return asymmetric(tally, path, dofs);
  return SymmetricMatrix{raw.rows, std::move(start), std::move(raw.entries.row),
                         std::move(raw.entries.value)};
}

}  // namespace stanchion
