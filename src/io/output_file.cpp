#include "io/output_file.hpp"

#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>

#include <cerrno>
#include <cstdio>
#include <cstdlib>
#include <cstring>

#include "io/deflate.hpp"
#include "io/text_source.hpp"

namespace stanchion {
namespace {

constexpr std::size_t kFlushBytes = std::size_t{1} << 20;

Status write_failure(int error, const std::string& path) {
  const std::string reason = std::strerror(error);
  if (error == ENOSPC || error == EDQUOT || error == EFBIG || error == EIO) {
    return Status::resource_limit("write-failed", "the file could not be written: " + reason, path,
                                  "free some disk space, or write to another disk");
  }
  return Status::bad_usage("cannot-write", "the file cannot be written: " + reason, path,
                           "check the folder's name and its permissions");
}

/// The permissions a newly created file gets; mkstemp is stricter than a plain open.
mode_t default_mode() {
  const mode_t mask = ::umask(0);
  ::umask(mask);
  return 0666 & ~mask;
}

}  // namespace

OutputFile::OutputFile(std::string path, bool compress)
    : path_(std::move(path)), temporary_(path_ + ".XXXXXX") {
  file_ = ::mkstemp(temporary_.data());
  if (file_ < 0) {
    status_ = write_failure(errno, path_);
    return;
  }
  if (compress) deflate_ = std::make_unique<DeflateStream>();
}

OutputFile::~OutputFile() {
  if (file_ < 0) return;
  ::close(file_);
  ::unlink(temporary_.c_str());
}

void OutputFile::raw_write(std::string_view bytes) {
  while (!bytes.empty() && status_.ok()) {
    const ssize_t written = ::write(file_, bytes.data(), bytes.size());
    if (written > 0) {
      bytes.remove_prefix(static_cast<std::size_t>(written));
    } else if (written < 0 && errno != EINTR) {
      status_ = write_failure(errno, path_);
    }
  }
}

void OutputFile::flush() {
  raw_write(pending_);
  pending_.clear();
}

void OutputFile::write(std::string_view bytes) {
  if (!status_.ok()) return;
  if (deflate_ != nullptr) {
    if (!deflate_->compress(bytes, false, pending_)) status_ = write_failure(ENOMEM, path_);
  } else if (bytes.size() >= kFlushBytes) {
    flush();
    raw_write(bytes);
  } else {
    pending_ += bytes;
  }
  if (pending_.size() >= kFlushBytes) flush();
}

void OutputFile::write_at(Offset position, std::string_view bytes) {
  flush();
  if (!status_.ok()) return;
  if (::pwrite(file_, bytes.data(), bytes.size(), position) != static_cast<ssize_t>(bytes.size())) {
    status_ = write_failure(errno, path_);
  }
}

Status OutputFile::commit() {
  if (status_.ok() && deflate_ != nullptr && !deflate_->compress({}, true, pending_)) {
    status_ = write_failure(ENOMEM, path_);
  }
  if (status_.ok()) flush();
  if (!status_.ok()) return status_;
  // A library may have replaced the file under the temporary name: mode and fsync go by name and by handle.
  if (::chmod(temporary_.c_str(), default_mode()) != 0 || ::fsync(file_) != 0 ||
      std::rename(temporary_.c_str(), path_.c_str()) != 0) {
    status_ = write_failure(errno, path_);
    return status_;
  }
  ::close(file_);
  file_ = -1;
  return {};
}

bool has_extension(const std::string& path, std::string_view extension) {
  if (path.size() < extension.size()) return false;
  return lower_case(std::string_view(path).substr(path.size() - extension.size())) == extension;
}

}  // namespace stanchion
