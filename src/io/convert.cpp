#include "io/convert.hpp"

#include "io/write_matrix.hpp"

namespace stanchion {

Result<Converted> convert(const std::string& in, const std::string& out, const ConvertOptions& options,
                          ThreadPool& pool) {
  if (Status status = check_output_name(out); !status.ok()) return status;
  auto file = read_matrix(in, options.read, pool);
  if (!file.ok()) return file.status();
  Converted converted{file->format, file->matrix.rows, file->matrix.entries(), std::move(file->warnings)};
  if (file->dofs && options.dofs_out.empty()) {
    converted.warnings.push_back(
        {"numbering-lost",
         "the equations were numbered in order of appearance, and the output keeps no names. "
         "Write the numbering to a dof map as well",
         out});
  }
  if (Status status = write_matrix(file->matrix, out); !status.ok()) return status;
  if (file->dofs && !options.dofs_out.empty()) {
    if (Status status = write_dof_map(*file->dofs, options.dofs_out); !status.ok()) return status;
  }
  return converted;
}

}  // namespace stanchion
