#include "oracle/shared_facts.hpp"

#include <cmath>
#include <fstream>
#include <nlohmann/json.hpp>
#include <sstream>

namespace stanchion::test {
namespace {

using Json = nlohmann::json;
using Full = std::vector<std::vector<double>>;

Json load(const char* name) {
  std::ifstream file(std::string(STANCHION_SHARED_DATA) + "/" + name);
  return Json::parse(file);
}

std::string path_of(const std::string& name) {
  return std::string(STANCHION_SHARED_DATA) + "/" + name + ".mtx";
}

std::optional<double> known_gap(const Json& fact, const Signs& inertia) {
  for (const char* key : {"min_nonzero_abs_eigenvalue", "min_abs_lambda"}) {
    // With zero eigenvalues min_abs_lambda is the roundoff of a zero.
    if (key == std::string("min_abs_lambda") && inertia[1] > 0) continue;
    if (fact.contains(key) && fact.at(key).is_number()) return fact.at(key).get<double>();
  }
  return std::nullopt;
}

/// Pascal's matrix of order n, `taken` off its last entry: determinant 1 - taken by expansion of that entry,
/// whose minor is Pascal's matrix of order n - 1 with determinant 1.
Full pascal(int n, double taken) {
  const auto size = static_cast<std::size_t>(n);
  Full p(size, std::vector<double>(size, 1.0));
  for (std::size_t i = 1; i < size; ++i) {
    for (std::size_t j = 1; j < size; ++j) p[i][j] = p[i - 1][j] + p[i][j - 1];
  }
  p.back().back() -= taken;
  return p;
}

double binomial(int n, int k) {
  double value = 1;
  for (int i = 1; i <= k; ++i) value = value * (n - k + i) / i;
  return std::round(value);
}

/// The integer inverse of Hilbert's matrix.
Full inverse_hilbert(int n) {
  const auto size = static_cast<std::size_t>(n);
  Full h(size, std::vector<double>(size));
  for (int i = 1; i <= n; ++i) {
    for (int j = 1; j <= n; ++j) {
      const double c = binomial(i + j - 2, i - 1);
      h[static_cast<std::size_t>(i - 1)][static_cast<std::size_t>(j - 1)] =
          ((i + j) % 2 == 0 ? 1 : -1) * (i + j - 1) * binomial(n + i - 1, n - j) *
          binomial(n + j - 1, n - i) * c * c;
    }
  }
  return h;
}

/// The matrices that published.json only names, by the beginning of the name.
const std::vector<std::pair<std::string, Full>>& named_matrices() {
  static const std::vector<std::pair<std::string, Full>> list{
      {"E1 ", {{1e-20, 1, 1}, {1, 1, 0}, {1, 0, 1}}},
      {"E2 ", {{0, 1e-8, 0}, {1e-8, 0, 1}, {0, 1, 1}}},
      {"E2b ", {{0, 1e-10, 0}, {1e-10, 0, 1}, {0, 1, 1}}},
      {"E3 ", {{0, 1}, {1, 0}}},
      {"Pascal 12 ", pascal(12, 0)},
      {"Pascal 18 (", pascal(18, 0)},
      {"Pascal 18 minus 1", pascal(18, 1)},
      {"Pascal 18 minus 2", pascal(18, 2)},
      {"invhilbert 10", inverse_hilbert(10)},
  };
  return list;
}

}  // namespace

std::string PencilFact::name() const {
  std::ostringstream text;
  text << std::filesystem::path(stiffness_path).stem().string() << " / "
       << std::filesystem::path(second_path).stem().string() << " at " << shift;
  return text.str();
}

std::vector<MatrixFact> matrix_facts() {
  std::vector<MatrixFact> facts;
  const Json file = load("facts.json");
  for (const auto& [name, fact] : file.at("matrices").items()) {
    MatrixFact known{name, path_of(name), fact.at("inertia").get<Signs>(), std::nullopt, false};
    known.gap = known_gap(fact, known.inertia);
    known.diagonal = fact.contains("entries_full") && fact.at("entries_full") <= fact.at("rows");
    facts.push_back(known);
  }
  return facts;
}

std::vector<PencilFact> pencil_facts() {
  std::vector<PencilFact> facts;
  const Json file = load("facts.json");
  for (const auto& [name, pair] : file.at("pairs").items()) {
    const auto slash = name.find('/');
    for (const auto& shift : pair.at("shifts")) {
      PencilFact known;
      known.stiffness_path = path_of(name.substr(0, slash));
      known.second_path = path_of(name.substr(slash + 1));
      known.second_definite_or_semidefinite = pair.at("finite_negative") == 0;
      known.shift = shift.at("shift");
      known.below =
          shift.value("count_below_from_gen_eig", shift.at("neg_of_K_minus_sM_scaled").get<Index>());
      facts.push_back(known);
    }
  }
  return facts;
}

std::vector<SmallFact> small_adversarial_facts() {
  std::vector<SmallFact> facts;
  const Json file = load("published.json").at("small_adversarial");
  for (const auto& [name, full] : named_matrices()) {
    for (const auto& [key, fact] : file.items()) {
      if (key.rfind(name, 0) == 0) facts.push_back({key, full, fact.at("exact(neg,zero,pos)").get<Signs>()});
    }
  }
  int number = 0;
  for (const auto& example : file.at("nopivot_flip_examples (A00=2^-50)")) {
    facts.push_back({"no-pivot flip " + std::to_string(++number), example.at("A").get<Full>(),
                     example.at("exact").get<Signs>()});
  }
  return facts;
}

SymmetricMatrix from_full(const Full& full) {
  std::vector<Triplet> entries;
  for (std::size_t i = 0; i < full.size(); ++i) {
    for (std::size_t j = 0; j <= i; ++j) {
      if (full[i][j] != 0) entries.push_back({static_cast<Index>(i), static_cast<Index>(j), full[i][j]});
    }
  }
  return from_triplets(static_cast<Index>(full.size()), entries);
}

}  // namespace stanchion::test
