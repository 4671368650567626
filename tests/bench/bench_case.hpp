// What one benchmark run is asked: a specimen, a question, threads, repetitions. The same for every program.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "specimen/specimen.hpp"

namespace stanchion::bench {

struct BenchArguments {
  std::string model;
  Offset unknowns = 0;
  int threads = 1;
  int repetitions = 3;
  std::string pencil = "stiffness";  ///< or geometric, mass
  double shift = 0;                  ///< of the pencil: K - s I, K + f G, K - s M
  bool definite = false;             ///< Cholesky-like, stopping at the first pivot that is not positive
  bool keep = false;                 ///< keep the factor
  bool certified = false;            ///< ours: all factorizations of the certificate, not just one
  bool least_memory = false;         ///< ours: no factor is kept, whatever that costs
  bool node_map = false;             ///< ours: tell the ordering which equations share a node
  bool our_order = false;            ///< peers: use our elimination order instead of their own
};

/// Reads the command line; prints usage and exits with 2 when it does not parse.
BenchArguments read_arguments(int argc, char** argv);

/// The matrices of one question, formed but not factored.
struct BenchCase {
  std::vector<SymmetricMatrix> members;
  std::vector<double> coefficients;  ///< one per member
  std::vector<Index> node_of;        ///< per equation, empty unless asked for
};

/// The question's members on their own patterns; exits with 2 when the specimen lacks a matrix.
BenchCase make_case(const BenchArguments& arguments);

/// The sum of the members: one matrix, as a solver that knows no pencils is given it.
SymmetricMatrix formed(const BenchCase& bench_case);

}  // namespace stanchion::bench
