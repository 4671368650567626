// A lattice footbridge over a harbour lock: two trusses with the deck between their lower chords, open above,
// so that only the deck frames keep the upper chords from leaving sideways under a crowd.
#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>
#include <utility>

#include "specimen/faults.hpp"
#include "specimen/member_part.hpp"
#include "specimen/models.hpp"
#include "specimen/pratt_truss.hpp"

namespace stanchion::specimen {
namespace {

constexpr double kPanel = 3.0, kHeight = 1.9, kDeckWidth = 3.2;  // m
constexpr double kCrowd = 5e3;                                   // N/m^2, reference load
constexpr Section kChord{4.6e-3, 1.03e-5, 1.03e-5, 1.6e-5};
constexpr Section kWeb{1.8e-3, 1.3e-6, 1.3e-6, 2.1e-6};
constexpr Section kCrossBeam{2.9e-3, 8.7e-6, 1.4e-6, 6.9e-8};
constexpr Section kBracing{6.9e-4, 2.4e-7, 2.4e-7, 3.9e-7};

/// Spans in a row over shared piers; each of `panels` panels; every member of `pieces` elements.
struct BridgeMesh {
  Index spans = 1, panels = 12, pieces = 2;

  Index joints() const { return spans * panels + 1; }  ///< lower joints of one truss
};

/// Equations without supports: joints of both trusses, and the nodes inside the members.
Offset unknowns_of(const BridgeMesh& mesh) {
  const Offset joints = Offset{2} * (2 * mesh.panels - 1);
  const Offset trusses = Offset{2} * (4 * mesh.panels - 5), deck = Offset{2} * mesh.panels;
  return 6 * (mesh.spans * (joints + (trusses + deck) * (mesh.pieces - 1)) + 2 + (mesh.pieces - 1));
}

BridgeMesh mesh_for(Offset unknowns) {
  BridgeMesh best;
  const Offset span = unknowns_of({2, 12, 2}) - unknowns_of({1, 12, 2});
  best.spans = static_cast<Index>(std::max<Offset>(1, (unknowns + span / 2) / span));
  if (best.spans > 1) return best;
  for (const Index panels : {4, 6, 8, 10, 12}) {
    for (const Index pieces : {1, 2}) {
      const BridgeMesh mesh{1, panels, pieces};
      if (std::abs(unknowns_of(mesh) - unknowns) < std::abs(unknowns_of(best) - unknowns)) best = mesh;
    }
  }
  return best;
}

/// Builds the bridge joint by joint and member by member.
class BridgeBuilder {
 public:
  BridgeBuilder(Model& model, const BridgeMesh& mesh) : model_(model), mesh_(mesh) {
    for (Index i = 0; i < mesh.joints(); ++i) {
      for (const int side : {0, 1}) {
        lower_[side].push_back(model.table.add_node({i * kPanel, side * kDeckWidth, 0}, kAllSix));
        const bool pier = i % mesh.panels == 0;
        upper_[side].push_back(
            pier ? -1 : model.table.add_node({i * kPanel, side * kDeckWidth, kHeight}, kAllSix));
      }
    }
  }

  void add_trusses(MassKind mass) {
    const PrattTruss truss{mesh_.panels, kPanel, kHeight, kCrowd * kPanel * kDeckWidth / 2};
    const std::vector<TrussMember> members = members_of(truss);
    for (Index span = 0; span < mesh_.spans; ++span) {
      for (const int side : {0, 1}) {
        for (const TrussMember& m : members) {
          const bool chord = m.role == TrussRole::kLowerChord || m.role == TrussRole::kUpperChord ||
                             m.role == TrussRole::kEndPost;
          add(chord ? chords_ : webs_, joint(span, side, m.start), joint(span, side, m.end), m.axial_force);
        }
      }
    }
    model_.parts.push_back(member_part(std::move(chords_), {kSteel, kChord, false, mass}));
    model_.parts.push_back(member_part(std::move(webs_), {kSteel, kWeb, false, mass}));
  }

  void add_deck(MassKind mass) {
    std::vector<PlacedMember> beams, braces;
    for (Index i = 0; i < mesh_.joints(); ++i) {
      add(beams, lower_[0][at(i)], lower_[1][at(i)], 0);
      if (i + 1 < mesh_.joints()) add(braces, lower_[i % 2][at(i)], lower_[1 - i % 2][at(i + 1)], 0);
    }
    model_.parts.push_back(member_part(std::move(beams), {kSteel, kCrossBeam, false, mass}));
    model_.parts.push_back(member_part(std::move(braces), {kSteel, kBracing, false, mass}));
  }

  /// Bearings: uz at every pier, uy on one side of it, ux at the first.
  void support() {
    for (Index pier = 0; pier <= mesh_.spans; ++pier) {
      const std::size_t j = at(pier * mesh_.panels);
      const DofSet along = pier == 0 ? dof_bit(Dof::kUx) : DofSet{0};
      model_.table.strike(lower_[0][j], static_cast<DofSet>(along | dof_bit(Dof::kUy) | dof_bit(Dof::kUz)));
      model_.table.strike(lower_[1][j], static_cast<DofSet>(along | dof_bit(Dof::kUz)));
    }
  }

 private:
  static std::size_t at(Index i) { return static_cast<std::size_t>(i); }

  Index joint(Index span, int side, const TrussJoint& j) const {
    const std::size_t place = at(span * mesh_.panels + j.number);
    return j.upper ? upper_[side][place] : lower_[side][place];
  }

  /// A member between two joints, cut into pieces with nodes of their own.
  void add(std::vector<PlacedMember>& members, Index start, Index end, double axial_force) {
    const Point from = model_.table.place(start), to = model_.table.place(end), up = natural_up(from, to);
    Index last = start;
    for (Index piece = 1; piece <= mesh_.pieces; ++piece) {
      const double r = static_cast<double>(piece) / mesh_.pieces;
      const Point place{from.x + r * (to.x - from.x), from.y + r * (to.y - from.y),
                        from.z + r * (to.z - from.z)};
      const Index next = piece == mesh_.pieces ? end : model_.table.add_node(place, kAllSix);
      const Point low = model_.table.place(last), high = model_.table.place(next);
      members.push_back({last, next, {low, high, up}, axial_force});
      last = next;
    }
  }

  Model& model_;
  const BridgeMesh mesh_;
  std::array<std::vector<Index>, 2> lower_, upper_;  ///< joints of either side; upper ones -1 at the piers
  std::vector<PlacedMember> chords_, webs_;
};

/// The cross beam at midspan of the first span gets its own nodes.
std::vector<Index> cut_cross_beam_off(Model& model, const BridgeMesh& mesh) {
  const double middle = mesh.panels * kPanel / 2;
  return detach(model, [&](const Part& part, Offset e) {
    const Point& a = model.table.place(part.element(e)[0]);
    const Point& b = model.table.place(part.element(e)[1]);
    const bool on_deck = a.z == 0 && b.z == 0;
    return on_deck && std::abs(a.x - middle) < 1e-9 && std::abs(b.x - middle) < 1e-9;
  });
}

ExpectedInertia expected_inertia(const Specimen& specimen, Fault fault) {
  return inertia_in_space(specimen, fault,
                          {.sound = "a connected rigid-jointed bridge on its bearings",
                           .free = "a rigid-jointed bridge without bearings has its six rigid motions",
                           .loose = "the cross beam at midspan is joined to nothing: its six rigid motions",
                           .motion = "a sagging motion"});
}

/// The whole bridge sags between its first two piers.
TrialMotion sagging(const BridgeMesh& mesh) {
  const double k = std::numbers::pi / (mesh.panels * kPanel);
  return [k](const Point& p) -> std::array<double, 6> {
    return {-p.z * k * std::cos(k * p.x), 0, std::sin(k * p.x), 0, -k * std::cos(k * p.x), 0};
  };
}

/// The mesh of the packaged model.
bool is_packaged(const BridgeMesh& mesh, const SpecimenOptions& options) {
  return mesh.spans == 1 && mesh.panels == 12 && mesh.pieces == 2 && options.fault == Fault::kNone &&
         options.mass == MassKind::kConsistent;
}

/// There is no closed form for a bridge: these are figures of the one mesh, from dense eigenvalues.
void add_packaged_facts(Expected& expected) {
  const std::string why = "dense eigenvalues of this very mesh, recomputed by the tests of the specimens";
  for (const auto& [shift, below] :
       {std::pair{-1.5, 0}, {1.5, 0}, {1.65, 2}, {2.0, 4}, {2.5, 8}, {4.0, 16}}) {
    expected.counts.push_back({Pencil::kGeometric, shift, below, why});
  }
  for (const auto& [shift, below] : {std::pair{300.0, 0}, {600.0, 1}, {1000.0, 3}, {3000.0, 10}}) {
    expected.counts.push_back({Pencil::kMass, shift, below, why});
  }
  for (const double factor : {1.61644189077, 1.61850061174, 1.67212653127}) {
    expected.values.push_back({Pencil::kGeometric, factor, 1, 1e-7, why});
  }
  expected.values.push_back({Pencil::kMass, 381.528321074, 1, 1e-7, why});
}

}  // namespace

Result<Specimen> make_lattice(Offset unknowns, const SpecimenOptions& options) {
  const BridgeMesh mesh = mesh_for(unknowns);
  Model model;
  BridgeBuilder builder(model, mesh);
  builder.add_trusses(options.mass);
  builder.add_deck(options.mass);
  if (options.fault != Fault::kFree) builder.support();
  if (options.fault == Fault::kLoosePart) cut_cross_beam_off(model, mesh);
  Specimen specimen = finish(std::move(model));
  if (options.fault == Fault::kNegativeSpring) add_negative_spring(specimen, sagging(mesh));
  specimen.name = "lattice";
  specimen.scenario = "Lattice footbridge over a harbour lock, " + std::to_string(mesh.spans) +
                      " span(s) of " + std::to_string(mesh.panels) +
                      " panels of 3 m, two open Pratt trusses 1.9 m high and 3.2 m "
                      "apart, every member of " +
                      std::to_string(mesh.pieces) +
                      " beam element(s); reference load a crowd of 5 kN/m2 on the deck.";
  specimen.expected.inertia = expected_inertia(specimen, options.fault);
  if (is_packaged(mesh, options)) add_packaged_facts(specimen.expected);
  return specimen;
}

}  // namespace stanchion::specimen
