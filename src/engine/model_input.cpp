#include "engine/model_input.hpp"

#include <algorithm>

#include "base/clock.hpp"
#include "base/digest.hpp"
#include "base/mapped_file.hpp"
#include "engine/fingerprint.hpp"
#include "io/equation_list.hpp"
#include "io/preflight.hpp"
#include "io/preflight_nodes.hpp"
#include "io/read_matrix.hpp"
#include "io/strike.hpp"
#include "model/input_files.hpp"

namespace stanchion {
namespace {

void append(Warnings& all, Warnings more) {
  for (Warning& warning : more) all.push_back(std::move(warning));
}

std::vector<Index> struck_equations(const EquationMap& map) {
  std::vector<Index> struck;
  for (std::size_t i = 0; i < map.reduced.size(); ++i) {
    if (map.reduced[i] < 0) struck.push_back(static_cast<Index>(i));
  }
  return struck;
}

class ModelReader {
 public:
  ModelReader(const Request& request, const RunContext& context, ThreadPool& pool, Outcome& outcome)
      : input_(request.input), request_(request), context_(context), pool_(pool), outcome_(outcome) {}

  Result<ModelInput> run() {
    const Stopwatch watch;
    if (context_.progress) context_.progress("read", 0);
    if (Status status = read_dofs(); !status.ok()) return status;
    if (Status status = read_matrices(); !status.ok()) return status;
    if (Status status = strike_equations(); !status.ok()) return status;
    if (Status status = inspect(); !status.ok()) return status;
    digest_tables();
    outcome_.rows_analysed = model_.stiffness.rows;
    outcome_.timings.read = watch.seconds();
    return std::move(model_);
  }

 private:
  Status read_dofs() {
    if (!input_.dofs) return {};
    auto map = read_dof_map(*input_.dofs, outcome_.warnings);
    if (!map.ok()) return map.status();
    model_.dofs = std::move(*map);
    return {};
  }

  Result<SymmetricMatrix> read(const std::string& path, MatrixRole role, const char* name,
                               std::optional<double> factor) {
    if (context_.cancel != nullptr && context_.cancel->cancelled()) return Status::interrupted();
    MatrixReadOptions options;
    options.role = role;
    options.symmetric_part = input_.symmetric_part;
    options.base = input_.base;
    options.rows = input_.rows;
    options.dofs = model_.dofs ? &*model_.dofs : nullptr;
    options.memory_limit_bytes = request_.memory_cap_bytes;
    auto file = read_matrix(path, options, pool_);
    if (!file.ok()) return file.status();
    append(outcome_.warnings, std::move(file->warnings));
    if (!model_.dofs && file->dofs) model_.dofs = std::move(file->dofs);
    outcome_.inputs.push_back({name, path, file->sha256, file->matrix.rows, file->matrix.entries(), factor});
    if (context_.log) context_.log(std::string("read ") + name + " " + path + ": " + file->format);
    return std::move(file->matrix);
  }

  Status read_matrices() {
    auto stiffness = read(input_.stiffness, MatrixRole::kStiffness, "stiffness", std::nullopt);
    if (!stiffness.ok()) return stiffness.status();
    model_.stiffness = std::move(*stiffness);
    if (model_.dofs && input_.dofs) {
      if (Status same = check_dof_map_size(*model_.dofs, *input_.dofs, model_.stiffness, input_.stiffness);
          !same.ok()) {
        return same;
      }
    }
    for (const AddedMatrix& added : input_.added) {
      auto matrix = read(added.path, MatrixRole::kSecond, "added", added.factor);
      if (!matrix.ok()) return matrix.status();
      if (Status same = check_same_size(model_.stiffness, input_.stiffness, *matrix, added.path); !same.ok())
        return same;
      model_.added.push_back(std::move(*matrix));
    }
    const auto& second = input_.geometric ? input_.geometric : input_.mass;
    if (!second) return {};
    auto matrix = input_.geometric ? read(*second, MatrixRole::kSecond, "geometric", std::nullopt)
                                   : read(*second, MatrixRole::kMass, "mass", std::nullopt);
    if (!matrix.ok()) return matrix.status();
    if (Status same = check_same_size(model_.stiffness, input_.stiffness, *matrix, *second); !same.ok())
      return same;
    model_.second = std::move(*matrix);
    return {};
  }

  Result<std::vector<Index>> equations_to_strike() {
    std::vector<Index> remove;
    if (input_.fix) {
      auto fixed = read_equation_list(*input_.fix, model_.stiffness.rows, dof_map(), outcome_.warnings);
      if (!fixed.ok()) return fixed.status();
      remove = std::move(*fixed);
    }
    if (input_.strike_held) {
      const std::vector<Index> stamped = identity_rows(model_.stiffness);
      remove.insert(remove.end(), stamped.begin(), stamped.end());
      if (model_.dofs) {
        const std::vector<Index> held = model_.dofs->held();
        remove.insert(remove.end(), held.begin(), held.end());
      }
    }
    return remove;
  }

  const std::vector<Index>* original() const { return model_.original.empty() ? nullptr : &model_.original; }
  const DofMap* dof_map() const { return model_.dofs ? &*model_.dofs : nullptr; }

  Status strike_equations() {
    if (input_.multipliers) {
      auto list =
          read_equation_list(*input_.multipliers, model_.stiffness.rows, dof_map(), outcome_.warnings);
      if (!list.ok()) return list.status();
      model_.multipliers = std::move(*list);
    } else if (model_.dofs) {
      model_.multipliers = model_.dofs->multipliers();
    }
    auto remove = equations_to_strike();
    if (!remove.ok()) return remove.status();
    if (remove->empty()) return {};
    auto map = strike_map(model_.stiffness.rows, *remove);
    if (!map.ok()) return map.status();
    outcome_.rows_struck = map->struck();
    outcome_.struck_sha256 = equations_fingerprint(struck_equations(*map));
    std::vector<SymmetricMatrix*> members{&model_.stiffness};
    for (SymmetricMatrix& added : model_.added) members.push_back(&added);
    if (model_.second) members.push_back(&*model_.second);
    for (SymmetricMatrix* member : members) {
      auto reduced = strike(*member, *map, pool_);
      if (!reduced.ok()) return reduced.status();
      *member = std::move(*reduced);
    }
    model_.multipliers = renumber(model_.multipliers, *map);
    if (model_.dofs) model_.dofs = model_.dofs->subset(map->original);
    model_.original = std::move(map->original);
    return {};
  }

  Status inspect() {
    auto stiffness = preflight({model_.stiffness, input_.stiffness, MatrixRole::kStiffness, dof_map(),
                                &model_.multipliers, original()});
    if (!stiffness.ok()) return stiffness.status();
    append(outcome_.warnings, std::move(stiffness->warnings));
    inspect_names();
    if (!model_.second) return {};
    const MatrixRole role = input_.mass ? MatrixRole::kMass : MatrixRole::kSecond;
    auto second = preflight({*model_.second, input_.mass ? *input_.mass : *input_.geometric, role, dof_map(),
                             nullptr, original()});
    if (!second.ok()) return second.status();
    append(outcome_.warnings, std::move(second->warnings));
    append(outcome_.warnings,
           compare_matrices(stiffness->facts, input_.stiffness, second->facts,
                            input_.mass ? *input_.mass : *input_.geometric, role, input_.load_sign_minus));
    return {};
  }

  /// Node tables serve drawings and names only: one that cannot be used is left out with a note.
  void inspect_names() {
    if (input_.nodes) {
      auto nodes = read_nodes(*input_.nodes);
      if (nodes.ok()) {
        model_.nodes = std::move(*nodes);
      } else {
        outcome_.warnings.push_back(
            {"nodes-unusable",
             "the node table cannot be used and is left out; places are not known. Reason: " +
                 nodes.status().message() + ". Remedy: " + nodes.status().remedy(),
             nodes.status().place()});
      }
    }
    if (!model_.dofs) return;
    if (model_.nodes && places_collapse(*model_.dofs, *model_.nodes)) {
      model_.nodes.reset();
      outcome_.warnings.push_back(
          {"nodes-unusable",
           "the node table cannot be used and is left out; places are not known. Reason: all nodes have one "
           "z, and more than half of them lie at the place of another. Remedy: give x, y and z of every node",
           *input_.nodes});
    }
    if (request_.want_location && input_.dofs)
      append(outcome_.warnings, inspect_partners(*model_.dofs, *input_.dofs));
    if (model_.nodes)
      append(outcome_.warnings,
             inspect_nodes(model_.stiffness, *model_.dofs, model_.multipliers, *model_.nodes, *input_.nodes));
  }

  /// What cannot be opened was refused, or left out with a warning, where it was read.
  void digest_tables() {
    std::vector<InputFile> files = input_files(input_);
    if (!request_.audit.values.empty()) files.push_back({"values", request_.audit.values, false});
    for (const InputFile& file : files) {
      if (file.matrix) continue;
      const auto bytes = MappedFile::open(file.path);
      if (bytes.ok()) outcome_.tables.push_back({file.role, file.path, sha256(bytes->bytes())});
    }
  }

  const InputRequest& input_;
  const Request& request_;
  const RunContext& context_;
  ThreadPool& pool_;
  Outcome& outcome_;
  ModelInput model_;
};

}  // namespace

Result<ModelInput> read_model(const Request& request, const RunContext& context, ThreadPool& pool,
                              Outcome& outcome) {
  return ModelReader(request, context, pool, outcome).run();
}

}  // namespace stanchion
