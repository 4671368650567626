#include "engine/location.hpp"

#include <algorithm>

#include "base/clock.hpp"
#include "diagnose/diagnosis.hpp"
#include "engine/host.hpp"
#include "engine/mass_totals.hpp"
#include "model/byte_size.hpp"

namespace stanchion {
namespace {

constexpr int kMostRounds = 2;  ///< of certifying again with a smaller offset

void leave_out(const char* code, const char* what, const char* instead, const Status& because,
               Outcome& outcome) {
  outcome.warnings.push_back({code,
                              std::string(what) + " cannot be used and is left out; " + instead +
                                  ". Reason: " + because.message() +
                                  (because.remedy().empty() ? "" : ". Remedy: " + because.remedy()),
                              because.place()});
}

/// The forecast of memory, now that the number of directions is known; refuses what does not fit.
Status forecast_locating(const PreparedPencil& pencil, const Inertia& inertia, const ConstraintRank& rank,
                         const Request& request, Outcome& outcome) {
  const Index negative = std::max<Index>(0, inertia.negative - rank.least);
  const Offset needed =
      with_allowance(diagnosis_bytes(pencil.analysis().tree.rows, inertia.zero, negative, request.locate));
  outcome.memory.forecast = std::max(outcome.memory.forecast, resident_bytes() + needed);
  if (needed <= pencil.free_bytes()) return {};
  return Status::resource_limit("memory-cap",
                                "the vectors of so many zero and negative directions are forecast to take " +
                                    size_needed(needed) + " beside what is in use, more than there is",
                                outcome.inputs.empty() ? "" : outcome.inputs.front().path,
                                "raise --memory-cap, use a larger machine, or ask for fewer with --most");
}

}  // namespace

Result<ModelInput> read_model_to_locate(const Request& request, const RunContext& context, ThreadPool& pool,
                                        Outcome& outcome) {
  const Outcome before = outcome;
  auto model = read_model(request, context, pool, outcome);
  if (model.ok() || !request.input.dofs) return model;
  // Is it the dof map? Only then does reading go on without it.
  if (model.status().place().rfind(*request.input.dofs, 0) != 0) return model;
  Request without = request;
  without.input.dofs.reset();
  outcome = before;
  leave_out("dof-map-unusable", "the dof map",
            "equations are named by their numbers, and multipliers are known from --multipliers only",
            model.status(), outcome);
  return read_model(without, context, pool, outcome);
}

LocationFacts collect_location_facts(ModelInput& model, const Request& request, Outcome& outcome) {
  LocationFacts facts;
  facts.dofs = model.dofs;
  facts.multipliers = model.multipliers;
  facts.original = model.original;
  facts.nodes = std::move(model.nodes);
  if (request.input.axes) {
    auto axes = read_axes(*request.input.axes);
    if (axes.ok()) {
      facts.axes = std::move(*axes);
    } else {
      leave_out("axes-unusable", "the table of nodal axes", "global directions are taken", axes.status(),
                outcome);
    }
  }
  if (request.input.mass && model.second) {
    if (model.dofs) {
      facts.mass = mass_totals(*model.second, *model.dofs, facts.nodes ? &*facts.nodes : nullptr,
                               facts.axes ? &*facts.axes : nullptr);
    }
    model.second.reset();
  }
  return facts;
}

Result<CertifiedInertia> certify_and_locate(PreparedPencil& pencil, const LocationFacts& facts,
                                            const Request& request, const ConstraintRank& rank,
                                            ThreadPool& pool, Outcome& outcome) {
  const ShiftedMatrix matrix = pencil.combination(0);
  ShiftedMatrix bare = matrix;  // K alone
  for (std::size_t t = 1; t < bare.coefficients.size(); ++t) bare.coefficients[t] = 0;
  const ModelNames names{facts.dofs ? &*facts.dofs : nullptr, facts.nodes ? &*facts.nodes : nullptr,
                         facts.axes ? &*facts.axes : nullptr, &facts.original, &facts.multipliers};
  std::optional<double> resolution;
  double seconds = 0;
  for (int round = 0;; ++round) {
    std::optional<KeptFactorization> kept;
    auto certified = pencil.certify_keeping(resolution, 0, kept, pool, outcome);
    if (!certified.ok()) return certified.status();
    if (certified->certificate.level == Level::kNone || !kept) return certified;
    if (Status fits = forecast_locating(pencil, certified->inertia, rank, request, outcome); !fits.ok())
      return fits;
    const Stopwatch watch;
    auto diagnosis =
        diagnose({pencil.analysis(), matrix, request.input.added.empty() ? nullptr : &bare, *kept, *certified,
                  names, rank.least, rank.least == rank.most, rank.bordered, request.locate, pencil.seed(),
                  round < kMostRounds && !request.resolution, request.resolution.has_value()},
                 pool);
    seconds += watch.seconds();
    if (diagnosis.sharper_resolution) {
      resolution = diagnosis.sharper_resolution;
      continue;
    }
    diagnosis.outcome.mass = facts.mass;
    diagnosis.outcome.seconds = seconds;
    outcome.located = std::move(diagnosis.outcome);
    return certified;
  }
}

}  // namespace stanchion
