#include "service/input_store.hpp"

#include <fcntl.h>
#include <sys/stat.h>

#include <algorithm>
#include <cerrno>
#include <chrono>
#include <filesystem>

namespace stanchion::service {
namespace {

namespace fs = std::filesystem;

constexpr std::int64_t kJustUsedMs = 60'000;

Status disk_failure(int error) {
  const bool full = error == ENOSPC || error == EDQUOT;
  return Status::resource_limit(
      full ? "disk-full" : "store",
      full ? "the disk that holds the store is full" : "the store cannot be written", "",
      "make room on the disk that holds the store");
}

bool flush_folder(const std::string& path) {
  const FileHandle folder(::open(path.c_str(), O_RDONLY | O_DIRECTORY | O_CLOEXEC));
  return folder && ::fsync(folder.get()) == 0;
}

Status unknown_input(const std::string& digest) {
  return Status::bad_input("unknown-input", "the store does not have this input", "sha256:" + digest,
                           "upload it first: POST /v1/inputs");
}

}  // namespace

bool is_digest(std::string_view text) {
  return text.size() == 64 && std::all_of(text.begin(), text.end(), [](char c) {
           return (c >= '0' && c <= '9') || (c >= 'a' && c <= 'f');
         });
}

InputStore::InputStore(std::string folder, std::int64_t most_bytes, JobJournal& journal)
    : folder_(std::move(folder)), most_bytes_(most_bytes), journal_(journal) {
  fs::create_directories(folder_ + "/inputs");
  fs::create_directories(folder_ + "/analyses");
  drop_abandoned_orders(analysis_folder());
  for (const auto& entry : fs::directory_iterator(folder_ + "/inputs")) {
    // Half an upload, or a whole one of which the table was not told any more.
    const std::string digest = entry.path().filename().string();
    bool known = false;
    const Status status =
        journal_.read([&](JobTable& table) { known = table.find_input(digest).has_value(); });
    if (!is_digest(digest) || (status.ok() && !known)) fs::remove(entry.path());
  }
}

bool InputStore::Upload::take(std::string_view bytes) {
  bytes_ += static_cast<std::int64_t>(bytes.size());
  if (too_long() || failed_) return false;
  digest_.update(bytes);
  while (!bytes.empty()) {
    const ssize_t written = ::write(file_.get(), bytes.data(), bytes.size());
    if (written < 0 && errno == EINTR) continue;
    if (written <= 0) {
      failed_ = true;
      return false;
    }
    bytes.remove_prefix(static_cast<std::size_t>(written));
  }
  return true;
}

Result<std::unique_ptr<InputStore::Upload>> InputStore::begin(std::int64_t most_bytes) {
  auto upload = std::make_unique<Upload>();
  upload->path_ = folder_ + "/inputs/upload-" + std::to_string(++next_upload_);
  upload->most_ = most_bytes;
  upload->file_ = FileHandle(::open(upload->path_.c_str(), O_WRONLY | O_CREAT | O_TRUNC | O_CLOEXEC, 0600));
  if (!upload->file_) return disk_failure(errno);
  return upload;
}

void InputStore::abandon(Upload& upload) {
  ::unlink(upload.path_.c_str());
}

Result<UploadResult> InputStore::finish(Upload& upload, const std::optional<std::string>& name,
                                        const std::string& expected) {
  const std::string digest = upload.digest_.finish();
  const auto fail = [&](Status status) {
    abandon(upload);
    return status;
  };
  if (!expected.empty() && expected != digest) {
    return fail(Status::bad_input("digest-differs", "the bytes that came have the digest " + digest,
                                  "sha256:" + expected, "send the file again"));
  }
  if (upload.failed_ || ::fsync(upload.file_.get()) != 0) return fail(disk_failure(errno));
  UploadResult result;
  result.input = {digest, upload.bytes_, now_ms(), now_ms(), name, false};
  Status written;
  {
    const std::lock_guard lock(mutex_);
    struct stat facts {};
    result.known = ::stat(path_of(digest).c_str(), &facts) == 0 && facts.st_size == upload.bytes_;
    if (result.known) {
      abandon(upload);
    } else if (::rename(upload.path_.c_str(), path_of(digest).c_str()) != 0 ||
               !flush_folder(folder_ + "/inputs")) {
      return fail(disk_failure(errno));
    }
    written = journal_.write([&](JobTable& table) { table.put_input(result.input); });
  }
  if (!written.ok()) return written;
  evict();
  if (used_bytes() > most_bytes_ && !result.known && remove(digest).ok()) {
    return Status::resource_limit("store-full", "the store is full of what queued and running jobs need", "",
                                  "wait until jobs have ended, or raise --store-size");
  }
  return result;
}

Result<FileHandle> InputStore::open(const std::string& digest) const {
  if (!is_digest(digest)) return unknown_input(digest);
  FileHandle handle(::open(path_of(digest).c_str(), O_RDONLY | O_CLOEXEC | O_NOFOLLOW));
  if (!handle) return unknown_input(digest);
  return handle;
}

Status InputStore::remove(const std::string& digest) {
  const std::lock_guard lock(mutex_);
  bool known = false, removed = false;
  const Status status = journal_.write([&](JobTable& table) {
    known = table.find_input(digest).has_value();
    removed = known && table.remove_input(digest);
  });
  if (!status.ok()) return status;
  if (!known) return unknown_input(digest);
  if (!removed) {
    return Status::bad_usage("input-needed", "a queued or running job needs this input", "sha256:" + digest,
                             "wait until the job has ended, or cancel it");
  }
  ::unlink(path_of(digest).c_str());
  return {};
}

std::vector<StoredOrder> InputStore::analyses() const {
  return stored_orders(analysis_folder());
}

std::int64_t InputStore::used_bytes() const {
  std::int64_t bytes = 0;
  if (!journal_.read([&](JobTable& table) { bytes = table.input_bytes(); }).ok()) return 0;
  for (const StoredOrder& analysis : analyses()) bytes += analysis.bytes;
  return bytes;
}

void InputStore::evict() {
  std::int64_t bytes = used_bytes();
  if (bytes <= most_bytes_) return;
  auto orders = analyses();  // the one to drop first is at the end
  std::vector<InputRecord> inputs;
  if (!journal_.read([&](JobTable& table) { inputs = table.evictable_inputs(1000); }).ok()) return;
  std::size_t next = 0;
  while (bytes > most_bytes_ && (next < inputs.size() || !orders.empty())) {
    // Somebody who has just uploaded a file is about to submit a job with it.
    const bool order_first =
        next == inputs.size() || (!orders.empty() && (orders.back().used_ms < inputs[next].used_ms ||
                                                      inputs[next].used_ms > now_ms() - kJustUsedMs));
    if (order_first) {
      // A job that reads it keeps it open; one that comes later finds the order anew.
      if (::unlink(orders.back().path.c_str()) == 0) ++evicted_;
      bytes -= orders.back().bytes;
      orders.pop_back();
    } else {
      if (remove(inputs[next].digest).ok()) {
        bytes -= inputs[next].bytes;
        ++evicted_;
      }
      ++next;
    }
  }
}

}  // namespace stanchion::service
