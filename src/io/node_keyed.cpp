// "node,dof,node,dof,value" lines: equations named by what they stand for.
#include <algorithm>
#include <array>
#include <memory>
#include <unordered_map>

#include "io/entry_text.hpp"
#include "io/matrix_formats.hpp"
#include "io/number.hpp"
#include "io/place.hpp"

namespace stanchion {
namespace {

/// Equation of each (node, dof), for many look-ups.
class EquationIndex {
 public:
  explicit EquationIndex(const DofMap* given) : fixed_(given != nullptr) {
    if (!fixed_) return;
    for (Index equation = 0; equation < given->equations(); ++equation) {
      equations_.try_emplace(key(given->node(equation), given->dof(equation)), equation);
    }
  }

  /// The equation, a new one in order of appearance when no map was given; -1 when the map has none.
  Index equation(NodeNumber node, std::string_view dof) {
    const Key wanted = key(node, dof);
    if (fixed_) {
      const auto at = equations_.find(wanted);
      return at == equations_.end() ? -1 : at->second;
    }
    const auto [at, added] = equations_.try_emplace(wanted, chosen_.equations());
    if (added) chosen_.append(node, dof);
    return at->second;
  }

  DofMap& chosen() { return chosen_; }

 private:
  struct Key {
    NodeNumber node;
    std::uint32_t name;
    bool operator==(const Key&) const = default;
  };
  struct Hash {
    std::size_t operator()(const Key& key) const {
      return static_cast<std::size_t>(key.node) * 0x9e3779b97f4a7c15U + key.name * 0xc2b2ae3d27d4eb4fU;
    }
  };

  Key key(NodeNumber node, std::string_view dof) {
    // The ten known names go by without regard to case, as in DofMap.
    name_.assign(dof);
    auto at = names_.find(name_);
    if (at == names_.end()) {
      const std::string lower = lower_case(dof);
      std::uint32_t number = static_cast<std::uint32_t>(names_.size());
      for (const char* known : {"ux", "uy", "uz", "rx", "ry", "rz", "p", "t", "multiplier", "held"}) {
        if (lower != known) continue;
        number = names_.try_emplace(lower, number).first->second;
      }
      at = names_.try_emplace(name_, number).first;
    }
    return {node, at->second};
  }

  bool fixed_;
  std::string name_;
  std::unordered_map<std::string, std::uint32_t> names_;
  std::unordered_map<Key, Index, Hash> equations_;
  DofMap chosen_;
};

struct KeyedLine {
  std::array<std::string_view, 5> field;
  int fields = 0;
};

KeyedLine split(std::string_view line, char separator) {
  KeyedLine keyed;
  std::size_t at = 0;
  const auto ends = [separator](char c) { return separator == 0 ? c == ' ' || c == '\t' : c == separator; };
  while (keyed.fields < 6) {
    while (at < line.size() && (line[at] == ' ' || line[at] == '\t')) ++at;
    if (at == line.size()) break;
    const std::size_t begin = at;
    while (at < line.size() && !ends(line[at])) ++at;
    if (keyed.fields < 5) {
      std::string_view field = trimmed(line.substr(begin, at - begin));
      if (field.size() >= 2 && field.front() == '"' && field.back() == '"')
        field = field.substr(1, field.size() - 2);
      keyed.field[static_cast<std::size_t>(keyed.fields)] = field;
    }
    ++keyed.fields;
    if (at < line.size()) ++at;
  }
  return keyed;
}

bool whole(std::string_view text, Offset& value) {
  const char* p = text.data();
  const char* const end = p + text.size();
  return scan_whole(p, end, value) == NumberFault::kNone && p == end && value >= 0;
}

class KeyedReader {
 public:
  KeyedReader(const ReadTask& task, char separator)
      : task_(task), separator_(separator), index_(std::make_shared<EquationIndex>(task.options.dofs)) {}

  Result<RawMatrix> read() {
    const std::string_view text = task_.source.text();
    const auto most = static_cast<Offset>(std::count(text.begin(), text.end(), '\n')) + 1;
    if (Status status = check_memory(0, most, task_.most_bytes, task_.path()); !status.ok()) return status;
    RawMatrix raw;
    raw.entries = EntryList(most);
    LineWalker walker(text);
    std::string_view line;
    bool first = true;
    while (walker.next(line)) {
      const std::string_view content = trimmed(line);
      if (content.empty() || content.front() == '%' || content.front() == '#') continue;
      const KeyedLine keyed = split(content, separator_);
      const bool header = first && is_header(keyed);
      first = false;
      if (header) continue;
      if (Status status = take(keyed, at_line(task_.path(), walker.number()), raw.entries); !status.ok()) {
        return status;
      }
    }
    return finish(raw);
  }

 private:
  /// Some word of a header line says what the columns are; other words are a fault, and named as such.
  static bool is_header(const KeyedLine& keyed) {
    Offset node = 0;
    if (whole(keyed.field[0], node)) return false;
    for (const std::string_view field : keyed.field) {
      const std::string name = lower_case(field);
      for (const char* word : {"node", "dof", "value"}) {
        if (name.find(word) != std::string::npos) return true;
      }
    }
    return false;
  }

  Status take(const KeyedLine& keyed, const std::string& place, EntryList& entries) {
    if (keyed.fields != 5) {
      return Status::bad_input(
          keyed.fields < 5 ? "missing-field" : "extra-text",
          "the line has " + std::string(keyed.fields < 5 ? "too few" : "too many") + " fields", place,
          "each line must be: node, dof, node, dof, value");
    }
    Index equations[2] = {0, 0};
    for (std::size_t side = 0; side < 2; ++side) {
      const std::string_view node_text = keyed.field[2 * side], dof = keyed.field[2 * side + 1];
      Offset node = 0;
      if (!whole(node_text, node)) {
        return Status::bad_input("bad-number", "\"" + excerpt(node_text) + "\" is not a node number", place,
                                 "each line must be: node, dof, node, dof, value");
      }
      if (dof.empty()) {
        return Status::bad_input("missing-field", "a dof name is empty", place,
                                 "each line must be: node, dof, node, dof, value");
      }
      equations[side] = index_->equation(node, dof);
      if (equations[side] < 0) {
        return Status::bad_input(
            "unknown-dof", "the dof map has no dof \"" + excerpt(dof) + "\" at node " + std::to_string(node),
            place, "check the names against the --dofs file");
      }
    }
    double value = 0;
    const char* p = keyed.field[4].data();
    const char* const end = p + keyed.field[4].size();
    const NumberFault fault = scan_real(p, end, value);
    if (fault != NumberFault::kNone || p != end) return bad_value(fault, keyed.field[4], place);
    entries.set(used_++, equations[0], equations[1], value);
    return {};
  }

  static Status bad_value(NumberFault fault, std::string_view text, const std::string& place) {
    const std::string shown = "\"" + excerpt(text) + "\"";
    if (fault == NumberFault::kOverflow) {
      return Status::bad_input("number-overflow", shown + " is larger than any double-precision number",
                               place, "check the value");
    }
    if (fault == NumberFault::kUnderflow) {
      return Status::bad_input("number-underflow",
                               shown + " is not zero, but smaller than any double-precision number", place,
                               "write 0 if zero is meant, or choose other units");
    }
    if (fault == NumberFault::kNotFinite) {
      return Status::bad_input("not-finite", shown + " is not a finite number", place,
                               "find the element that produced it: often one of zero length or zero area");
    }
    return Status::bad_input("bad-number", shown + " is not a number", place,
                             "write numbers like -1.5e+03, with a decimal point");
  }

  Result<RawMatrix> finish(RawMatrix& raw) {
    if (used_ == 0) {
      return Status::bad_input("empty-file", "the file holds no entries", task_.path(),
                               "export the matrix again");
    }
    const auto shrink = [this](auto& data) { data.shrink(used_); };
    shrink(raw.entries.row);
    shrink(raw.entries.column);
    shrink(raw.entries.value);
    const bool mapped = task_.options.dofs != nullptr;
    raw.rows = mapped ? task_.options.dofs->equations() : index_->chosen().equations();
    raw.format = mapped ? "node-keyed triplets, numbered by the dof map"
                        : "node-keyed triplets, numbered in order of appearance";
    if (!mapped) raw.dofs = index_->chosen();
    const std::string_view text = task_.source.text();
    raw.lines_of = [index = index_, text, separator = separator_](EntryPlace place) {
      return find_lines(*index, text, separator, place);
    };
    warn_unfinished_line(text.empty() || text.back() == '\n', task_.path(), raw.warnings);
    return std::move(raw);
  }

  static std::pair<Offset, Offset> find_lines(EquationIndex& index, std::string_view text, char separator,
                                              EntryPlace place) {
    LineWalker walker(text);
    std::string_view line;
    Offset found = 0;
    while (walker.next(line)) {
      const KeyedLine keyed = split(trimmed(line), separator);
      Offset first = 0, second = 0;
      if (keyed.fields != 5 || !whole(keyed.field[0], first) || !whole(keyed.field[2], second)) continue;
      if (index.equation(first, keyed.field[1]) != place.row) continue;
      if (index.equation(second, keyed.field[3]) != place.column) continue;
      if (found != 0) return {found, walker.number()};
      found = walker.number();
    }
    return {found, 0};
  }

  const ReadTask& task_;
  char separator_;
  std::shared_ptr<EquationIndex> index_;
  Offset used_ = 0;
};

}  // namespace

Result<RawMatrix> read_node_keyed(const ReadTask& task, char separator) {
  return KeyedReader(task, separator).read();
}

}  // namespace stanchion
