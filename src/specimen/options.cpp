#include "specimen/options.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <string_view>
#include <utility>

namespace stanchion {
namespace {

template <class Choice>
using Word = std::pair<const char*, Choice>;

constexpr std::array kFaults{Word<Fault>{"none", Fault::kNone},
                             Word<Fault>{"free", Fault::kFree},
                             Word<Fault>{"loose-part", Fault::kLoosePart},
                             Word<Fault>{"hinge", Fault::kHinge},
                             Word<Fault>{"soft-spring", Fault::kSoftSpring},
                             Word<Fault>{"negative-spring", Fault::kNegativeSpring},
                             Word<Fault>{"repeated-tie", Fault::kRepeatedTie}};
constexpr std::array kLoads{Word<PlateLoad>{"uniaxial", PlateLoad::kUniaxial},
                            Word<PlateLoad>{"biaxial", PlateLoad::kBiaxial},
                            Word<PlateLoad>{"shear", PlateLoad::kShear}};
constexpr std::array kEdges{Word<PlateEdges>{"simple", PlateEdges::kSimple},
                            Word<PlateEdges>{"clamped", PlateEdges::kClamped}};
constexpr std::array kEnds{Word<ColumnEnds>{"fixed-free", ColumnEnds::kFixedFree},
                           Word<ColumnEnds>{"pinned-pinned", ColumnEnds::kPinnedPinned},
                           Word<ColumnEnds>{"fixed-pinned", ColumnEnds::kFixedPinned},
                           Word<ColumnEnds>{"fixed-fixed", ColumnEnds::kFixedFixed},
                           Word<ColumnEnds>{"fixed-guided", ColumnEnds::kFixedGuided}};
constexpr std::array kMasses{Word<MassKind>{"consistent", MassKind::kConsistent},
                             Word<MassKind>{"lumped", MassKind::kLumped}};

template <class Words>
auto choice_from(const Words& words, const std::string& word, const std::string& what)
    -> Result<typename Words::value_type::second_type> {
  std::string known;
  for (const auto& [text, choice] : words) {
    if (word == text) return choice;
    known += std::string(known.empty() ? "" : ", ") + text;
  }
  return Status::bad_usage("unknown-" + what, "there is no " + what + " called '" + word + "'", what,
                           "choose one of " + known);
}

/// Whether `word` is one of the words in `list`, which are separated by spaces.
bool knows(std::string_view list, std::string_view word) {
  while (!list.empty()) {
    const std::size_t end = std::min(list.find(' '), list.size());
    if (list.substr(0, end) == word) return true;
    list.remove_prefix(std::min(end + 1, list.size()));
  }
  return false;
}

}  // namespace

Result<Fault> fault_from(const std::string& word) {
  return choice_from(kFaults, word, "fault");
}
Result<PlateLoad> plate_load_from(const std::string& word) {
  return choice_from(kLoads, word, "load");
}
Result<PlateEdges> plate_edges_from(const std::string& word) {
  return choice_from(kEdges, word, "edges");
}
Result<ColumnEnds> column_ends_from(const std::string& word) {
  return choice_from(kEnds, word, "ends");
}
Result<MassKind> mass_kind_from(const std::string& word) {
  return choice_from(kMasses, word, "mass");
}

namespace specimen {

const char* fault_word(Fault fault) {
  for (const auto& [text, choice] : kFaults) {
    if (choice == fault) return text;
  }
  return "none";
}

Status check_options(const SpecimenEntry& entry, Offset unknowns, const SpecimenOptions& options) {
  constexpr Offset kMost = 500'000'000;
  if (unknowns < 1 || unknowns > kMost) {
    return Status::bad_usage("unknowns-out-of-range", "cannot make " + std::to_string(unknowns) + " unknowns",
                             "unknowns", "give a number from 1 to " + std::to_string(kMost));
  }
  if (!knows(entry.faults, fault_word(options.fault))) {
    return Status::bad_usage("fault-not-known-here",
                             std::string(entry.name) + " has no fault '" + fault_word(options.fault) + "'",
                             "fault", std::string("choose one of: ") + entry.faults);
  }
  if (!(options.aspect >= 0.1 && options.aspect <= 10)) {
    return Status::bad_usage("aspect-out-of-range", "the aspect ratio must lie between 0.1 and 10", "aspect",
                             "give length over width, or over radius, for example 2");
  }
  if (!(std::abs(options.offset) <= 1)) {
    return Status::bad_usage(
        "offset-out-of-range", "the offset must lie between -1 and 1 m", "offset",
        "give the height of the plate's middle surface above its nodes, for example 0.005");
  }
  if (!(options.softness > 0 && options.softness <= 1)) {
    return Status::bad_usage("softness-out-of-range", "the softness must be above 0 and at most 1",
                             "softness", "give a spring over a typical stiffness, for example 1e-8");
  }
  return {};
}

}  // namespace specimen
}  // namespace stanchion
