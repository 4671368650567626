// What makes two jobs the same: the contents of their inputs, their options and the version of the program;
// not names of files and not their times.
#pragma once

#include <map>
#include <mutex>
#include <string>

#include "jobs/job_request.hpp"

namespace stanchion {

/// Digests of files, each read once as long as it stays as it is (device, inode, size, times). Thread safe.
class FileDigests {
 public:
  /// SHA-256 of the bytes as they lie on disk. Bad input "file-not-found", "not-a-file", "cannot-read".
  Result<std::string> of(const std::string& path);

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

  std::mutex mutex_;
  std::map<std::string, Known> known_;
};

/// 64 hexadecimal digits. The order of keys in the request does not matter, nor does "threads": answers have
/// the same bits for every number of threads. Errors: those of FileDigests::of, at the input's path.
Result<std::string> digest_of(const JobRequest& request, FileDigests& files);

}  // namespace stanchion
