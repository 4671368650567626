// Uploaded files by the digest of their bytes, and room for them: what was used least recently goes first.
#pragma once

#include <atomic>
#include <cstdint>
#include <functional>
#include <memory>
#include <mutex>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "base/digest.hpp"
#include "base/file_handle.hpp"
#include "jobs/analysis_store.hpp"
#include "service/job_journal.hpp"
#include "stanchion/status.hpp"

namespace stanchion::service {

struct UploadResult {
  InputRecord input;
  bool known = false;
};

/// Thread safe.
class InputStore {
 public:
  /// `folder` with its subfolders inputs and analyses; what interrupted uploads left behind is removed.
  InputStore(std::string folder, std::int64_t most_bytes, JobJournal& journal);

  /// One upload under way: a file that has no name yet.
  class Upload {
   public:
    /// False when the disk is full or the upload is longer than allowed.
    bool take(std::string_view bytes);
    std::int64_t bytes() const { return bytes_; }
    bool too_long() const { return bytes_ > most_; }
    /// When not all came: whether that was the sender's doing, not the disk's.
    bool broken_by_reader() const { return !failed_; }

   private:
    friend class InputStore;
    FileHandle file_;
    std::string path_;
    Sha256 digest_;
    std::int64_t bytes_ = 0, most_ = 0;
    bool failed_ = false;
  };

  Result<std::unique_ptr<Upload>> begin(std::int64_t most_bytes);

  /// Keeps it: safe on disk when this returns. Bad input "digest-differs" when `expected` is another digest;
  /// resource limits "store-full", "disk-full". An upload that is not finished is removed by `abandon`.
  Result<UploadResult> finish(Upload& upload, const std::optional<std::string>& name,
                              const std::string& expected);
  void abandon(Upload& upload);

  /// Opens the bytes of an input; bad input "unknown-input".
  Result<FileHandle> open(const std::string& digest) const;

  /// Bad input "unknown-input"; bad usage "input-needed" while a queued or running job needs it.
  Status remove(const std::string& digest);

  /// Makes room: drops inputs that no queued or running job needs and analyses, the least recently used
  /// first, until at most the limit is used.
  void evict();

  std::string analysis_folder() const { return folder_ + "/analyses"; }
  std::vector<StoredOrder> analyses() const;  ///< the most recently used first
  std::int64_t used_bytes() const;
  std::int64_t most_bytes() const { return most_bytes_; }
  std::uint64_t evicted() const { return evicted_; }

 private:
  std::string path_of(const std::string& digest) const { return folder_ + "/inputs/" + digest; }

  std::string folder_;
  std::int64_t most_bytes_;
  JobJournal& journal_;
  mutable std::mutex mutex_;  ///< while names of files and rows of the table have to agree
  std::atomic<std::uint64_t> evicted_{0}, next_upload_{0};
};

bool is_digest(std::string_view text);

}  // namespace stanchion::service
