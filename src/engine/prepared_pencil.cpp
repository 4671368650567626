#include "engine/prepared_pencil.hpp"

#include <algorithm>
#include <cmath>
#include <unordered_map>

#include "base/clock.hpp"
#include "base/counter_random.hpp"
#include "dense/blas.hpp"
#include "dense/selftest.hpp"
#include "engine/fingerprint.hpp"
#include "engine/host.hpp"
#include "extended/factorize.hpp"
#include "jobs/analysis_store.hpp"
#include "model/byte_size.hpp"
#include "model/not_checked.hpp"
#include "order/weak_diagonal.hpp"
#include "sparse/product.hpp"
#include "sparse/scaling.hpp"

namespace stanchion {
namespace {

SymmetricMatrix identity(Index rows) {
  SymmetricMatrix matrix{rows, Buffer<Offset>(Offset{rows} + 1), Buffer<Index>(rows),
                         Buffer<double>(rows, 1.0)};
  for (Index i = 0; i < rows; ++i) {
    matrix.column_start[i] = i;
    matrix.row[i] = i;
  }
  matrix.column_start[rows] = rows;
  return matrix;
}

/// Node numbers of the equations, renumbered from 0; negative for none.
std::vector<Index> nodes_of(const std::optional<DofMap>& dofs, Index rows) {
  std::vector<Index> nodes;
  if (!dofs || dofs->equations() != rows) return nodes;
  nodes.reserve(static_cast<std::size_t>(rows));
  std::unordered_map<NodeNumber, Index> number;
  for (Index i = 0; i < rows; ++i) {
    const NodeNumber node = dofs->node(i);
    if (node == kNoNode) {
      nodes.push_back(-1);
    } else {
      nodes.push_back(number.try_emplace(node, static_cast<Index>(number.size())).first->second);
    }
  }
  return nodes;
}

/// The user's seed and the first 64 bits of every input's digest.
std::uint64_t mixed_seed(std::uint64_t seed, const std::vector<InputRecord>& inputs) {
  for (const InputRecord& input : inputs) {
    seed = CounterRandom::combine(seed, std::strtoull(input.sha256.substr(0, 16).c_str(), nullptr, 16));
  }
  return seed;
}

/// Half a unit of decimal digit `digits` of any number over its size, rounded up.
double half_unit_of(int digits) {
  return 0.5 * std::pow(10.0, 1 - digits) * 1.001;
}

/// Entries a row, in the lower triangle, from which single precision is tried unasked: elements that fill a
/// volume have some 36. Frames and shells have 4 to 23 and are conditioned so that its bound seldom closes: a
/// frame of 100,000 lost 0.4 of the time of its count to the attempt.
constexpr Offset kEntriesOfVolumes = 30;
/// A job of some seconds: the arithmetic is tried before it, for some tens of milliseconds.
constexpr double kLongJobFlops = 5e10;

bool same_pattern(const SymmetricMatrix& pattern, const SharedAnalysis& shared) {
  return pattern.column_start.size() == shared.column_start.size() &&
         pattern.row.size() == shared.row.size() &&
         std::equal(pattern.column_start.begin(), pattern.column_start.end(), shared.column_start.begin()) &&
         std::equal(pattern.row.begin(), pattern.row.end(), shared.row.begin());
}

/// The one of the matrix before, where the pattern is the same; else a new one, kept in mind for the next.
Result<Analysis> analysis_of(const SymmetricMatrix& pattern, const std::vector<Index>& nodes,
                             std::span<const char> weak, const Request& request, int workers,
                             SharedAnalysis* shared) {
  if (shared != nullptr && shared->analysis && same_pattern(pattern, *shared)) {
    ++shared->reused;
    Analysis analysis = std::move(*shared->analysis);
    shared->analysis.reset();
    analysis.order_seconds = analysis.analyse_seconds = 0;
    return analysis;
  }
  if (shared != nullptr) {
    shared->column_start = pattern.column_start.clone();
    shared->row = pattern.row.clone();
    shared->analysis.reset();
  }
  // A second opinion owes nothing to what the first has left.
  if (!request.analysis_store || request.second_path) {
    return analyse({&pattern, nodes, true, request.second_path, nullptr, 1, weak}, workers);
  }
  AnalysisStore store(*request.analysis_store);
  return analyse({&pattern, nodes, true, false, &store, 1, weak}, workers);
}

Status check_cap(const Request& request, Offset needed) {
  if (!request.memory_cap_bytes || needed <= *request.memory_cap_bytes) return {};
  return Status::resource_limit(
      "memory-cap",
      "the run is forecast to need " + size_needed(needed) + ", more than the cap of " +
          size_allowed(*request.memory_cap_bytes),
      request.input.stiffness,
      "raise --memory-cap, use fewer --threads, or give --dofs for a better ordering");
}

}  // namespace

Offset with_allowance(Offset bytes) {
  return bytes + bytes / 10 + (Offset{2} << 20);
}

double second_factor(const Request& request, double shift) {
  return request.pencil == Pencil::kGeometric && !request.input.load_sign_minus ? shift : -shift;
}

int threads_of(const Request& request) {
  return request.threads > 0 ? request.threads : available_processors();
}

Outcome begin_outcome(const char* command, const Request& request, Question question) {
  Outcome outcome;
  outcome.command = command;
  outcome.host = describe_host();
  outcome.not_checked = not_checked(request, question);
  outcome.risk_allowed = request.risk;
  outcome.seed = request.seed;
  outcome.digits = request.digits;
  return outcome;
}

void finish_outcome(Outcome& outcome, double total_seconds) {
  outcome.memory.peak = peak_resident_bytes();
  outcome.timings.total = total_seconds;
}

Result<PreparedPencil> PreparedPencil::make(ModelInput& model, bool with_identity, const Request& request,
                                            const RunContext& context, ThreadPool& pool, Outcome& outcome,
                                            SharedAnalysis* shared) {
  PreparedPencil pencil;
  if (context.progress) context.progress("order", 0);
  std::optional<SymmetricMatrix> unit;
  if (with_identity) unit = identity(model.stiffness.rows);
  std::vector<const SymmetricMatrix*> members{&model.stiffness};
  for (const SymmetricMatrix& added : model.added) members.push_back(&added);
  if (model.second) members.push_back(&*model.second);
  if (unit) members.push_back(&*unit);
  pencil.has_second_ = model.second || unit;
  for (std::size_t k = 0; k < model.added.size(); ++k) {
    pencil.added_factors_.push_back(request.input.added[k].factor);  // a part of the model may have none
  }

  pencil.original_ = model.original;
  pencil.file_rows_ = outcome.rows_analysed + outcome.rows_struck;
  MatrixFamily family = members.size() == 1 ? family_of(std::move(model.stiffness)) : unite(members, &pool);
  model.stiffness = SymmetricMatrix{};  // the union holds everything now
  model.second.reset();
  model.added.clear();
  unit.reset();
  // A single shift may ask for pairs; an order for many serves none of them alone.
  std::vector<char> weak;
  if (pencil.has_second_ && request.shifts.size() == 1)
    weak = weak_diagonals(family, pencil.combination(second_factor(request, request.shifts[0])).coefficients);
  // The ordering reads the pattern and which diagonals are zero; the first member's values serve for that.
  SymmetricMatrix pattern{family.rows, std::move(family.column_start), std::move(family.row),
                          std::move(family.values[0])};
  const std::vector<Index> nodes = nodes_of(model.dofs, family.rows);
  auto analysis = analysis_of(pattern, nodes, weak, request, pool.size(), shared);
  if (!analysis.ok()) return analysis.status();
  if (context.cancel != nullptr && context.cancel->cancelled()) return Status::interrupted();
  pencil.analysis_ = std::move(*analysis);
  const Stopwatch watch;
  family.column_start = std::move(pattern.column_start);
  family.row = std::move(pattern.row);
  family.values[0] = std::move(pattern.value);
  pencil.family_ = permute(family, pencil.analysis_.tree.position_of, &pool);
  family = MatrixFamily{};
  auto scale = power_of_two_scaling(pencil.family_, pencil.combination(0).coefficients, &pool);
  if (!scale.ok()) return scale.status();
  pencil.scale_ = std::move(*scale);
  outcome.scaling_sha256 =
      scaling_fingerprint(pencil.scale_.span(), pencil.analysis_.tree.position_of.span());
  pencil.resolution_ = request.resolution;
  pencil.memory_cap_ = request.memory_cap_bytes;
  pencil.extended_ = request.precision == Precision::kExtended;
  if (request.precision == Precision::kSingle) pencil.single_ = SingleUse::kOnly;
  if (request.precision == Precision::kAutomatic &&
      pencil.family_.entries() >= kEntriesOfVolumes * pencil.family_.rows) {
    pencil.single_ = SingleUse::kWhereFaster;
  }
  // One document, one budget: matrices that were certified before this one have charged it already.
  pencil.risk_ =
      std::make_shared<RiskBudget>(request.risk, outcome.risk, static_cast<Index>(outcome.events.size()));
  pencil.seed_ = mixed_seed(request.seed, outcome.inputs);
  pencil.factor_options_.seed = pencil.seed_;
  pencil.factor_options_.workspace = std::make_shared<FactorWorkspace>();
  pencil.factor_options_.progress = context.progress;
  pencil.factor_options_.cancel = context.cancel;

  const StructureForecast& forecast = pencil.analysis_.forecast;
  outcome.work.analysis_reused = outcome.work.analysis_reused || pencil.analysis_.known_order;
  outcome.timings.order += pencil.analysis_.order_seconds;
  outcome.timings.analyse += pencil.analysis_.analyse_seconds + watch.seconds();
  outcome.work.factor_flops = forecast.factor_flops;
  outcome.work.factor_entries = forecast.factor_entries;
  outcome.work.supernodes = pencil.analysis_.tree.fronts;
  outcome.work.largest_front = forecast.largest_front;
  const Offset resident = resident_bytes();
  pencil.resident_before_ = resident;
  // A witness is sought with a factor kept in double precision, whatever the verdict's own precision.
  const Offset numeric = request.want_witness ? std::max(pencil.counting_bytes(), forecast.peak_bytes_solve)
                                              : pencil.counting_bytes();
  outcome.memory.forecast = std::max(peak_resident_bytes(), resident + with_allowance(numeric));
  if (Status fits = check_cap(request, outcome.memory.forecast); !fits.ok()) return fits;
  if (forecast.factor_flops > kLongJobFlops && context.progress) context.progress("self-test", 0);
  if (forecast.factor_flops > kLongJobFlops) {
    use_single_threaded_blas();
    if (Status sound = arithmetic_selftest(SelftestLevel::kQuick); !sound.ok()) return sound;
  }
  if (request.memory_cap_bytes)
    pencil.factor_options_.memory_cap_bytes = *request.memory_cap_bytes - resident;
  return pencil;
}

/// Of a factorization whose factor is not kept, in the precision asked for; in single precision it is kept.
Offset PreparedPencil::counting_bytes() const {
  if (single_ == SingleUse::kOnly) return analysis_.forecast.peak_bytes_single;
  return extended_ ? extended_peak_bytes_forecast(analysis_) : analysis_.forecast.peak_bytes_count;
}

/// What keeping the factor may take: the cap, or most of what the machine has left, less what is in use.
Offset PreparedPencil::bytes_for_factor() const {
  const Offset most = memory_cap_ ? *memory_cap_ : total_memory_bytes() / 10 * 8;
  return most - resident_bytes();
}

Status PreparedPencil::cannot_keep_factor(Offset needed, const Outcome& outcome) const {
  return Status::resource_limit("memory-cap",
                                "keeping the factor, which locating needs, is forecast to take " +
                                    size_needed(needed) + " beside what is in use, more than there is",
                                outcome.inputs.empty() ? "" : outcome.inputs.front().path,
                                "raise --memory-cap, use a larger machine, or ask check without --locate");
}

ShiftedMatrix PreparedPencil::combination(double factor) const {
  ShiftedMatrix matrix{&family_, {1.0}, &scale_, 0};
  matrix.coefficients.insert(matrix.coefficients.end(), added_factors_.begin(), added_factors_.end());
  if (has_second_) matrix.coefficients.push_back(factor);
  return matrix;
}

ShiftedMatrix PreparedPencil::second_alone() const {
  ShiftedMatrix matrix = combination(1);
  if (has_second_) std::fill(matrix.coefficients.begin(), matrix.coefficients.end() - 1, 0.0);
  return matrix;
}

LikelyWork PreparedPencil::likely_work(bool definite_first) const {
  CertifyOptions options;
  options.offsets.definite_first = definite_first;
  options.offsets.resolution = resolution_;
  options.risk = extended_ ? nullptr : risk_.get();
  options.single = single_;
  options.most_factor_bytes = bytes_for_factor();
  return stanchion::likely_work(analysis_, options);
}

TripletMatrix PreparedPencil::formed(double factor, double offset) const {
  const ShiftedMatrix matrix = combination(factor);
  TripletMatrix triplets{family_.rows, {}, {}, {}};
  for (Index j = 0; j < family_.rows; ++j) {
    for (Offset k = family_.column_start[j]; k < family_.column_start[Offset{j} + 1]; ++k) {
      const Index i = family_.row[k];
      triplets.row.push_back(i + 1);
      triplets.column.push_back(j + 1);
      triplets.value.push_back(matrix.entry(k, i, j) - (i == j ? offset : 0));
    }
  }
  return triplets;
}

/// Of one count among others, by `threads`: the most it may take, or what it is likely to.
Offset PreparedPencil::bytes_of_one_count(int threads, bool likely) const {
  if (extended_) return counting_bytes();
  const PeakBytes peak = peak_bytes(analysis_, threads);
  if (single_ == SingleUse::kOnly) return peak.single;
  if (!likely) return peak.solve;
  const LikelyWork work = likely_work(false);
  return work.single ? peak.single : work.relative ? peak.solve : peak.count;
}

int PreparedPencil::side_by_side(int most, Offset room) const {
  int many = std::max(most, 1);
  while (many > 1 && many * with_allowance(bytes_of_one_count(most / many, false)) > room) --many;
  return many;
}

Offset PreparedPencil::bytes_side_by_side(int many, int threads) const {
  const Offset counting = many * with_allowance(bytes_of_one_count(threads, true));
  return std::max(peak_resident_bytes(), resident_bytes() + counting);
}

Result<std::optional<DefiniteBase>> PreparedPencil::definite_base(double factor, double smallest_eigenvalue,
                                                                  bool prove, ThreadPool& pool,
                                                                  Outcome& outcome) {
  const double spent_before = risk_->spent();
  DefiniteBaseCost cost;
  const DefiniteBaseOptions options{factor_options_, smallest_eigenvalue, risk_.get(), seed_, prove, &cost};
  auto base = DefiniteBase::make(analysis_, combination(factor), options, pool);
  if (!base.ok()) return base.status();
  outcome.work.factorizations += cost.factorizations;
  outcome.timings.factor += cost.factor_seconds;
  outcome.timings.certify += cost.certify_seconds;
  const Offset beside = cost.factorizations > 1 ? analysis_.forecast.peak_bytes_count : 0;
  outcome.memory.forecast =
      std::max(outcome.memory.forecast,
               resident_before_ + with_allowance(analysis_.forecast.peak_bytes_solve + beside));
  outcome.risk = risk_->spent();
  if (risk_->spent() > spent_before) {
    outcome.events.push_back({has_second_ ? std::optional(factor) : std::nullopt,
                              risk_->spent() - spent_before, base->has_value()});
  }
  return base;
}

Result<std::optional<ShiftedInverse>> PreparedPencil::shifted_inverse(double factor, ThreadPool& pool,
                                                                      Outcome& outcome) {
  if (analysis_.forecast.peak_bytes_solve > bytes_for_factor()) return std::optional<ShiftedInverse>{};
  auto inverse = ShiftedInverse::make(analysis_, combination(factor), factor_options_, pool);
  if (!inverse.ok()) return inverse.status();
  ++outcome.work.factorizations;
  if (*inverse) outcome.timings.factor += (*inverse)->factor_seconds();
  return inverse;
}

Mode PreparedPencil::mode_of(const std::vector<double>& vector, double value, double residual) const {
  Mode mode{std::vector<double>(static_cast<std::size_t>(file_rows_), 0.0), value, residual};
  double largest = 0;
  for (Index p = 0; p < analysis_.tree.rows; ++p) {
    const double entry = vector[static_cast<std::size_t>(p)] * scale_[p];
    const Index equation = analysis_.tree.equation_at[p];
    const Index in_file = original_.empty() ? equation : original_[static_cast<std::size_t>(equation)];
    mode.shape[static_cast<std::size_t>(in_file)] = entry;
    if (std::fabs(entry) > std::fabs(largest)) largest = entry;
  }
  if (largest == 0) return mode;
  for (double& entry : mode.shape) entry /= largest;
  return mode;
}

ShiftedMatrix PreparedPencil::second(double coefficient) const {
  ShiftedMatrix matrix = second_alone();
  if (has_second_) matrix.coefficients.back() = coefficient;
  return matrix;
}

double PreparedPencil::size_ratio() const {
  return has_second_ ? infinity_norm(combination(0)) / infinity_norm(second_alone()) : 0;
}

void PreparedPencil::set_second_bound_from_diagonal(std::optional<int> digits) {
  const Buffer<double>& second = family_.values.back();
  second_bound_ = INFINITY;
  for (Index j = 0; j < family_.rows; ++j) {
    for (Offset k = family_.column_start[j]; k < family_.column_start[Offset{j} + 1]; ++k) {
      if (family_.row[k] == j) second_bound_ = std::min(second_bound_, second[k] * scale_[j] * scale_[j]);
    }
  }
  if (digits) second_bound_ *= 1 - half_unit_of(*digits);
}

double PreparedPencil::digits_error(double factor, int digits) const {
  return digits_error(combination(factor), digits);
}

double PreparedPencil::digits_error(const ShiftedMatrix& matrix, int digits) const {
  // Each member was rounded on its own: the row sums of sum_t |coefficient_t| |A_t|, scaled.
  const Buffer<double>& scale = *matrix.scale;
  std::vector<double> sums(static_cast<std::size_t>(family_.rows), 0);
  for (Index j = 0; j < family_.rows; ++j) {
    for (Offset k = family_.column_start[j]; k < family_.column_start[Offset{j} + 1]; ++k) {
      const Index i = family_.row[k];
      double size = 0;
      for (std::size_t t = 0; t < matrix.coefficients.size(); ++t) {
        size += std::fabs(matrix.coefficients[t] * family_.values[t][k]);
      }
      size *= scale[i] * scale[j];
      sums[static_cast<std::size_t>(i)] += size;
      if (i != j) sums[static_cast<std::size_t>(j)] += size;
    }
  }
  const double largest = sums.empty() ? 0 : *std::max_element(sums.begin(), sums.end());
  return half_unit_of(digits) * largest;
}

}  // namespace stanchion
