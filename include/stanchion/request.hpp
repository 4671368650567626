// What a run is asked: plain data, validated by model/validate.hpp before the engine sees it.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "stanchion/types.hpp"

namespace stanchion {

enum class Pencil {
  kStiffness,  ///< K alone; shifts are eigenvalues of K in its mixed units
  kGeometric,  ///< K + f G
  kMass,       ///< K - s M
};

enum class Precision {
  kDouble,
  kExtended,  ///< factored in double-double: slow, for what double cannot tell apart
};

/// One `--add FILE:factor`.
struct AddedMatrix {
  std::string path;
  double factor = 1;
};

/// How the files are to be read; common to every command.
struct InputRequest {
  std::string stiffness;
  std::optional<std::string> geometric, mass;
  std::vector<AddedMatrix> added;
  std::optional<std::string> dofs, nodes, axes, fix, multipliers;
  bool load_sign_minus = false;  ///< the second matrix was written for K - f G
  bool symmetric_part = false;
  bool strike_held = false;
  std::optional<int> base;         ///< 0 or 1, for triplet text
  std::optional<Index> rows;       ///< for triplet text with empty last rows
};

struct Request {
  InputRequest input;
  Pencil pencil = Pencil::kStiffness;
  std::vector<double> shifts;  ///< for count
  int threads = 0;             ///< 0: all processors available
  std::optional<Offset> memory_cap_bytes;
  std::optional<double> resolution;
  double risk = 1e-6;
  std::optional<int> digits;
  std::uint64_t seed = 1;
  Precision precision = Precision::kDouble;
  bool want_witness = false;  ///< check: also look for x with x^T A x < 0 beyond its rounding
  bool second_path = false;   ///< another ordering and the plain kernels, to repeat a claim independently
};

}  // namespace stanchion
