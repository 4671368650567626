#include "bench/bench_case.hpp"

#include <CLI/CLI.hpp>
#include <cstdio>
#include <cstdlib>

#include "sparse/matrix_family.hpp"

namespace stanchion::bench {
namespace {

[[noreturn]] void refuse(const std::string& message) {
  std::fprintf(stderr, "%s\n", message.c_str());
  std::exit(2);
}

SymmetricMatrix identity(Index rows) {
  SymmetricMatrix matrix{rows, Buffer<Offset>(Offset{rows} + 1), Buffer<Index>(rows),
                         Buffer<double>(rows, 1.0)};
  for (Index i = 0; i < rows; ++i) matrix.column_start[i] = matrix.row[i] = i;
  matrix.column_start[rows] = rows;
  return matrix;
}

SymmetricMatrix second_matrix(const BenchArguments& arguments, Specimen& specimen) {
  if (arguments.pencil == "stiffness") return identity(specimen.stiffness.rows);
  auto& chosen = arguments.pencil == "geometric" ? specimen.geometric : specimen.mass;
  if (!chosen) refuse("the specimen " + arguments.model + " has no " + arguments.pencil + " matrix");
  return std::move(*chosen);
}

}  // namespace

BenchArguments read_arguments(int argc, char** argv) {
  BenchArguments a;
  CLI::App app("Times one factorization of a specimen; one JSON line per repetition.");
  app.add_option("model", a.model,
                 "specimen: solid, plate, cylinder, frame, lattice, column, saddle, laplace; plate-coupled: "
                 "its middle surface 5 mm off the nodes")
      ->required();
  app.add_option("unknowns", a.unknowns, "about this many equations")->required();
  app.add_option("--threads", a.threads, "ours: workers; peers: threads of the BLAS")->capture_default_str();
  app.add_option("--repeat", a.repetitions, "repetitions, analysis included")->capture_default_str();
  app.add_option("--pencil", a.pencil, "what the shift multiplies")
      ->check(CLI::IsMember({"stiffness", "geometric", "mass"}));
  app.add_option("--shift", a.shift, "K - s I, K + f G or K - s M; 0 is K itself");
  app.add_flag("--definite", a.definite, "no pivoting: the positive definite question");
  app.add_flag("--keep", a.keep, "keep the factor (default: discard it where the program can)");
  app.add_flag("--certified", a.certified, "ours: the certified inertia, with all factorizations it takes");
  app.add_flag("--least-memory", a.least_memory, "ours: certify by offsets alone, which keep no factor");
  app.add_flag("--node-map", a.node_map, "ours: give the node of every equation to the ordering");
  app.add_flag("--our-order", a.our_order, "peers: use our elimination order");
  try {
    app.parse(argc, argv);
  } catch (const CLI::ParseError& error) {
    std::exit(app.exit(error) == 0 ? 0 : 2);
  }
  return a;
}

BenchCase make_case(const BenchArguments& arguments) {
  const bool coupled = arguments.model == "plate-coupled";
  SpecimenOptions options;
  if (coupled) options.offset = 0.005;
  auto made = make_specimen(coupled ? "plate" : arguments.model, arguments.unknowns, options);
  if (!made.ok()) refuse(made.status().to_string());
  BenchCase result;
  result.coefficients.push_back(1);
  if (arguments.shift != 0) {
    result.members.push_back(second_matrix(arguments, *made));
    result.coefficients.push_back(arguments.pencil == "geometric" ? arguments.shift : -arguments.shift);
  }
  result.members.insert(result.members.begin(), std::move(made->stiffness));
  if (arguments.node_map) {
    for (const SpecimenDof& dof : made->dofs) result.node_of.push_back(dof.node);
  }
  return result;
}

SymmetricMatrix formed(const BenchCase& bench_case) {
  if (bench_case.members.size() == 1) return bench_case.members[0].clone();
  std::vector<const SymmetricMatrix*> members;
  for (const auto& member : bench_case.members) members.push_back(&member);
  MatrixFamily family = unite(members);
  Buffer<double> sum = std::move(family.values[0]);
  for (std::size_t t = 1; t < family.values.size(); ++t) {
    for (Offset k = 0; k < sum.size(); ++k) sum[k] += bench_case.coefficients[t] * family.values[t][k];
  }
  return {family.rows, std::move(family.column_start), std::move(family.row), std::move(sum)};
}

}  // namespace stanchion::bench
