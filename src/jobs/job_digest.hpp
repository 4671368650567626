// What makes two jobs the same: the contents of their inputs, their options and the version of the program;
// not names of files and not their times.
#pragma once

#include <sys/stat.h>

#include <map>
#include <mutex>
#include <optional>
#include <string>

#include "base/cancellation.hpp"
#include "jobs/job_request.hpp"

namespace stanchion {

/// Digests of files, each read once as long as it stays as it is (device, inode, size, times). Thread safe.
class FileDigests {
 public:
  /// SHA-256 of the bytes as they lie on disk. Bad input "file-not-found", "not-a-file", "cannot-read";
  /// Interrupted when `stop` fires.
  Result<std::string> of(const std::string& path, const CancellationToken* stop = nullptr);

  /// Whether the file was read before and is as it was then.
  bool knows(const std::string& path);

 private:
  struct Stamp {
    unsigned long long device = 0, inode = 0, size = 0;
    long long changed_ns = 0, modified_ns = 0;
    bool operator==(const Stamp&) const = default;
  };
  struct Known {
    Stamp stamp;
    std::string sha256;
  };

  static Stamp stamp_of(const struct stat& about);
  std::optional<std::string> find(const std::string& path, const Stamp& stamp);

  std::mutex mutex_;
  std::map<std::string, Known> known_;
};

/// 64 hexadecimal digits. The order of keys in the request does not matter, nor does "threads": answers have
/// the same bits for every number of threads. Errors: those of FileDigests::of, at the input's path.
Result<std::string> digest_of(const JobRequest& request, FileDigests& files,
                              const CancellationToken* stop = nullptr);

/// Whether digest_of would find it without reading: every input is known, and as it was.
bool digest_is_known(const JobRequest& request, FileDigests& files);

}  // namespace stanchion
