#include "engine/library_recheck.hpp"

#include <cmath>

#include "engine/prepared_pencil.hpp"

namespace stanchion {
namespace {

/// A factorization to be made again: the second matrix's coefficient, the offset, and how many negative
/// pivots it had.
struct Asked {
  std::optional<double> shift;
  double factor = 0, offset = 0;
  Index negative = 0;
};

/// The runs that decide: the last at plus and at minus the resolution, as far as there are any.
void add_deciding_runs(const Certificate& certificate, const Asked& at, std::vector<Asked>& list) {
  if (!certificate.resolution) return;
  for (const double offset : {*certificate.resolution, -*certificate.resolution}) {
    const OffsetRun* last = nullptr;
    for (const OffsetRun& run : certificate.runs) {
      if (run.offset == offset && run.error_bound) last = &run;
    }
    if (last != nullptr) list.push_back({at.shift, at.factor, offset, last->negative});
  }
}

/// True when a row of the mass holds nothing.
bool some_massless(const ModelInput& model) {
  std::vector<char> present(static_cast<std::size_t>(model.stiffness.rows), 0);
  const SymmetricMatrix& mass = *model.second;
  for (Index j = 0; j < mass.rows; ++j) {
    for (Offset k = mass.column_start[j]; k < mass.column_start[Offset{j} + 1]; ++k) {
      if (mass.value[k] != 0)
        present[static_cast<std::size_t>(j)] = present[static_cast<std::size_t>(mass.row[k])] = 1;
    }
  }
  for (const char here : present) {
    if (here == 0) return true;
  }
  return false;
}

std::vector<Asked> list_of(const Request& request, const Outcome& claimed, bool relative_counts) {
  std::vector<Asked> list;
  const auto add = [&](const Certificate& certificate, const Asked& at, bool relative) {
    if (certificate.level == Level::kNone || certificate.precision == "extended") return;
    if (certificate.method == "offsets") add_deciding_runs(certificate, at, list);
    if (certificate.method == "relative" && relative) list.push_back(at);
  };
  if (claimed.check) add(claimed.check->certificate, {{}, 0, 0, claimed.check->inertia.negative}, true);
  if (claimed.count) {
    for (const ShiftCount& count : claimed.count->counts) {
      const double factor = second_factor(request, count.shift);
      add(count.certificate, {count.shift, factor, 0, count.below.value_or(0)},
          relative_counts && count.below.has_value());
    }
  }
  return list;
}

}  // namespace

Result<std::vector<LibraryCount>> count_by_library(const Request& request, const Outcome& claimed,
                                                   const CountNegative& count, const RunContext& context) {
  ThreadPool pool(threads_of(request));
  Outcome scratch = begin_outcome("recheck", request, claimed.check ? Question::kCheck : Question::kCount);
  auto model = read_model(request, context, pool, scratch);
  if (!model.ok()) return model.status();
  const bool relative_counts =
      model->multipliers.empty() && (request.pencil != Pencil::kMass || !some_massless(*model));
  const bool alone = claimed.count && request.pencil == Pencil::kStiffness;
  const auto pencil = PreparedPencil::make(*model, alone, request, context, pool, scratch);
  if (!pencil.ok()) return pencil.status();
  std::vector<LibraryCount> counts;
  if (scratch.scaling_sha256 != claimed.scaling_sha256) return counts;
  for (const Asked& asked : list_of(request, claimed, relative_counts)) {
    if (context.cancel != nullptr && context.cancel->cancelled()) return Status::interrupted();
    const Result<Index> found = count(pencil->formed(asked.factor, asked.offset));
    LibraryCount& answer =
        counts.emplace_back(LibraryCount{asked.shift, asked.offset, asked.negative, {}, {}});
    if (found.ok()) {
      answer.found = *found;
    } else {
      answer.why_not = found.status().message();
    }
  }
  return counts;
}

}  // namespace stanchion
