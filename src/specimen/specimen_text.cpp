#include "specimen/specimen_text.hpp"

#include <charconv>

namespace stanchion {
namespace {

void append(std::string& text, auto number) {
  char digits[32];
  text.append(digits, std::to_chars(digits, digits + sizeof digits, number).ptr);
}

std::string quoted(const std::string& text) {
  std::string out = "\"";
  for (const char c : text) {
    if (c == '"' || c == '\\') out += '\\';
    out += c;
  }
  return out + '"';
}

/// Builds one JSON object or array; the text carries its own indent.
class Json {
 public:
  explicit Json(int depth) : indent_(static_cast<std::size_t>(2 * depth), ' ') {}

  Json& raw(const char* key, const std::string& value) {
    body_ += (body_.empty() ? "\n" : ",\n") + indent_ + "  ";
    if (key != nullptr) body_ += quoted(key) + ": ";
    body_ += value;
    return *this;
  }
  Json& text(const char* key, const std::string& value) { return raw(key, quoted(value)); }
  Json& number(const char* key, auto value) {
    std::string digits;
    append(digits, value);
    return raw(key, digits);
  }
  std::string object() const { return body_.empty() ? "{}" : "{" + body_ + "\n" + indent_ + "}"; }
  std::string array() const { return body_.empty() ? "[]" : "[" + body_ + "\n" + indent_ + "]"; }

 private:
  std::string indent_, body_;
};

const char* pencil_word(Pencil pencil) {
  switch (pencil) {
    case Pencil::kGeometric:
      return "geometric";
    case Pencil::kMass:
      return "mass";
    default:
      return "stiffness";
  }
}

std::string counts_json(const std::vector<ExpectedCount>& counts) {
  Json list(1);
  for (const ExpectedCount& count : counts) {
    Json entry(2);
    entry.text("pencil", pencil_word(count.pencil)).number("shift", count.shift).number("below", count.below);
    list.raw(nullptr, entry.text("why", count.why).object());
  }
  return list.array();
}

std::string values_json(const std::vector<ExpectedValue>& values) {
  Json list(1);
  for (const ExpectedValue& value : values) {
    Json entry(2);
    entry.text("pencil", pencil_word(value.pencil)).number("value", value.value);
    entry.number("multiplicity", value.multiplicity).number("relative_tolerance", value.tolerance);
    list.raw(nullptr, entry.text("why", value.why).object());
  }
  return list.array();
}

}  // namespace

std::string dofs_csv(const Specimen& specimen) {
  std::string text = "equation,node,dof\n";
  for (std::size_t i = 0; i < specimen.dofs.size(); ++i) {
    append(text, i + 1);
    text += ',';
    append(text, specimen.dofs[i].node);
    text += std::string(",") + specimen::dof_name(specimen.dofs[i].dof) + '\n';
  }
  return text;
}

std::string nodes_csv(const Specimen& specimen) {
  std::string text = "node,x,y,z\n";
  for (std::size_t i = 0; i < specimen.nodes.size(); ++i) {
    append(text, i + 1);
    for (const double coordinate : {specimen.nodes[i].x, specimen.nodes[i].y, specimen.nodes[i].z}) {
      text += ',';
      append(text, coordinate);
    }
    text += '\n';
  }
  return text;
}

std::string multipliers_text(const Specimen& specimen) {
  if (specimen.multipliers.empty()) return {};
  std::string text = "equation\n";
  for (const Index equation : specimen.multipliers) {
    append(text, equation + 1);
    text += '\n';
  }
  return text;
}

std::string expected_json(const Specimen& specimen) {
  const Expected& expected = specimen.expected;
  Json document(0);
  document.text("specimen", specimen.name).text("scenario", specimen.scenario);
  document.number("rows", specimen.stiffness.rows).number("entries", specimen.stiffness.entries());
  Json inertia(1);
  inertia.number("negative", expected.inertia.negative).number("zero", expected.inertia.zero);
  inertia.number("positive", expected.inertia.positive).text("why", expected.inertia.why);
  document.raw("inertia", inertia.object());
  if (const auto& c = expected.constrained) {
    Json constrained(1);
    constrained.number("multipliers", c->multipliers)
        .number("rank", c->rank)
        .number("redundant", c->redundant);
    constrained.number("negative", c->negative).number("zero", c->zero).number("positive", c->positive);
    document.raw("constrained", constrained.object());
  }
  document.raw("counts", counts_json(expected.counts));
  document.raw("values", values_json(expected.values));
  return document.object() + "\n";
}

}  // namespace stanchion
