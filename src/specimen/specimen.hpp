// Invented models of known character, to try the program on: matrices, dof map, nodes and what is known of
// them.
#pragma once

#include <optional>
#include <span>
#include <string>
#include <vector>

#include "sparse/symmetric_matrix.hpp"
#include "specimen/dof_table.hpp"
#include "specimen/expected.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// One equation of the matrices.
struct SpecimenDof {
  Index node = 0;  ///< number of the node, from 1
  specimen::Dof dof = specimen::Dof::kUx;
};

/// A complete model. Units: N, m, kg, rad.
struct Specimen {
  std::string name;
  std::string scenario;  ///< the invented structure and its mesh, in one or two sentences
  SymmetricMatrix stiffness;
  std::optional<SymmetricMatrix> geometric;  ///< for K + f G, f = 1 being the reference load
  std::optional<SymmetricMatrix> mass;       ///< for K - s M
  std::vector<SpecimenDof> dofs;             ///< one for each equation
  std::vector<specimen::Point> nodes;        ///< node number - 1 -> place, m
  std::vector<Index> multipliers;            ///< equations of Lagrange multipliers, from 0; the last ones
  Expected expected;
};

/// A defect planted on purpose; see each model's line in specimen_list() for those it knows.
enum class Fault {
  kNone,
  kFree,            ///< no supports at all: all rigid motions
  kLoosePart,       ///< a part whose nodes were never joined to the rest: its six rigid motions
  kHinge,           ///< a part that can still turn, or a storey that can sway
  kSoftSpring,      ///< the loose part, held by very soft springs: definite, but barely
  kNegativeSpring,  ///< one spring of negative stiffness: exactly one negative eigenvalue
  kRepeatedTie,     ///< saddle: constraints given twice
};
enum class PlateLoad { kUniaxial, kBiaxial, kShear };
enum class PlateEdges { kSimple, kClamped };
enum class ColumnEnds { kFixedFree, kPinnedPinned, kFixedPinned, kFixedFixed, kFixedGuided };
enum class MassKind { kConsistent, kLumped };

/// What may be varied; a model passes over what does not concern it.
struct SpecimenOptions {
  Fault fault = Fault::kNone;
  PlateLoad load = PlateLoad::kUniaxial;
  PlateEdges edges = PlateEdges::kSimple;
  ColumnEnds ends = ColumnEnds::kPinnedPinned;
  MassKind mass = MassKind::kConsistent;
  double aspect = 2;  ///< plate: length over width; cylinder: length over radius; 0.1 to 10
  double offset =
      0;  ///< plate: height of the middle surface above the nodes, m; couples membrane and bending
  double softness = 1e-8;  ///< kSoftSpring: spring over a typical stiffness, > 0
};

/// The options by the words of the command line: "loose-part", "biaxial", "clamped", "fixed-free", "lumped",
/// ... Bad usage with the list of words that are known.
Result<Fault> fault_from(const std::string& word);
Result<PlateLoad> plate_load_from(const std::string& word);
Result<PlateEdges> plate_edges_from(const std::string& word);
Result<ColumnEnds> column_ends_from(const std::string& word);
Result<MassKind> mass_kind_from(const std::string& word);

/// One model that make_specimen knows.
struct SpecimenEntry {
  const char* name;
  const char* line;    ///< what it is, in one line
  const char* faults;  ///< the words of the faults it knows, separated by spaces
};
std::span<const SpecimenEntry> specimen_list();

/// Builds the model `name` with about `unknowns` equations: the nearest practical mesh. The same arguments
/// give the same bits. Bad usage: unknown name, a fault or an option value that the model does not know,
/// `unknowns` below 1 or too large for 32-bit rows. Resource limit: out of memory. Cost: linear in the
/// unknowns, about 4 microseconds each; memory: the matrices and little more. Thread safe.
Result<Specimen> make_specimen(const std::string& name, Offset unknowns, const SpecimenOptions& options = {});

}  // namespace stanchion
