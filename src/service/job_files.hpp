// The files of a job: its folder, what a run leaves there, and where its inputs are seen by the run.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "base/file_handle.hpp"
#include "jobs/job_request.hpp"
#include "service/input_store.hpp"
#include "service/roots.hpp"

namespace stanchion::service {

/// A kind of file that a job may leave.
struct JobFile {
  const char* name;    ///< in the API: "result"
  const char* file;    ///< in the folder: "result.json"
  const char* option;  ///< that asks the run to write it; null: the service writes it
  const char* content_type;
};

const std::vector<JobFile>& job_files();
const JobFile* job_file(const std::string& name);

/// What the options of a run have to be besides those of the request, for the files that its command can
/// leave.
std::vector<std::string> output_arguments(const JobRequest& request);

/// Inputs of one job, held open as long as the run needs them, however files are moved or dropped meanwhile.
class OpenInputs {
 public:
  /// Opens all that the request names (roots or uploads); bad input as Roots and InputStore say.
  static Result<OpenInputs> open(const JobRequest& request, const Roots& roots, const InputStore& store);

  std::int64_t bytes() const { return bytes_; }  ///< of all files together
  bool all_plain() const { return all_plain_; }  ///< none is compressed or an archive
  std::vector<std::string> digests() const { return digests_; }

  /// Puts links to the open files into `folder`, under the names by which the request calls them, and makes
  /// these the paths of the request.
  Status link_into(const std::string& folder, JobRequest& request,
                   const std::vector<std::optional<std::string>>& names) const;

 private:
  std::vector<FileHandle> handles_;  ///< one an input of the request
  std::vector<std::string> digests_;
  std::int64_t bytes_ = 0;
  bool all_plain_ = true;
};

/// "sha256:..." to its digits; nothing for other names.
std::optional<std::string> digest_in(const std::string& input_name);

/// First sentence of the answer in a result file; nothing when there is none.
std::optional<std::string> headline_of(const std::string& result_path);

}  // namespace stanchion::service
